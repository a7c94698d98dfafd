#pragma once
// Do the check standards of an analyzer span the decision levels of a measurand? A question to all charts of
// both, so it is asked where all their views are at hand.
#include <optional>
#include <vector>

#include "core/base/index.hpp"
#include "daemon/engine/snapshot.hpp"

namespace agreed {

/// The range from the lowest to the highest mean of the standards; a standard without readings counts with
/// the reference value of its first lot.
struct StandardRange {
  double lowest = 0, highest = 0;
  std::vector<double> uncovered;  ///< decision levels outside it
};

/// Nothing while some standard's level is not known, and where every decision level lies within the range.
[[nodiscard]] std::optional<StandardRange> range_not_covered(const Snapshot& snapshot, ChartIndex index);

}  // namespace agreed
