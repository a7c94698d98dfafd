#pragma once
// The generator behind the stories of page_mill.hpp: Harrow Mill with so many pairs and readings.
#include "tests/daemon/render/page_mill.hpp"

namespace agreed::mill {

/// `drift`: how far protein of line2 has moved at the end.
[[nodiscard]] Story story(int pairs, int readings, double drift);
[[nodiscard]] Alert alert_of(std::int64_t id, AlertKind kind, Severity severity, Instant at);

}  // namespace agreed::mill
