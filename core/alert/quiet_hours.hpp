#pragma once
// Purpose: the hours in which something is expected, and when a wait is over if only those count.
// Inputs: weekly hours of rest in UTC, any number, overlapping or not.
// Degenerate: with rest around the clock no wait is ever over. Cost: O(hours of rest) a change between rest
// and work.
#include <array>
#include <optional>
#include <span>

#include "core/base/instant.hpp"

namespace agreed {

/// Hours of rest that begin on certain days of the week.
struct QuietHours {
  std::array<bool, 7> days{true, true, true, true, true, true, true};  ///< from Monday
  std::chrono::minutes from{0};
  std::chrono::minutes to{24 * 60};  ///< not after `from`: on the next day
};

/// When `wait` has passed since `from`, hours of rest left out; nothing if not within ten years.
[[nodiscard]] std::optional<Instant> end_of_wait(std::span<const QuietHours> quiet, Instant from,
                                                 Duration wait);

}  // namespace agreed
