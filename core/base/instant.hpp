#pragma once
// Points in time. Three times are never mixed: measured_at (the analyzer's statement), received_at (our UTC
// clock when the row came) and monotonic time (waiting; only in daemon/). The core is told the time and never
// asks.
#include <chrono>

namespace agreed {

using Duration = std::chrono::milliseconds;
/// UTC, to the millisecond.
using Instant = std::chrono::sys_time<Duration>;

}  // namespace agreed
