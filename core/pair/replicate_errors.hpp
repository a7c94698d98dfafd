#pragma once
// Purpose: the error ratio from the replicates of the split samples themselves.
// Inputs: the window: of each pair the sums of squares of its replicates about their means.
// Method: variance within samples pooled over the window by degrees of freedom, k - 1 a sample and side; of
//   errors proportional to the level the squares are first divided by the squared mean of the sample.
// Assumptions: replicates are repeated under the conditions between which the analyzers are compared.
// Repeated
//   at once they say nothing of what changes between runs, and lambda is that of the repeatability alone.
// Degenerate: `reason` says so when either side has no replicates, or they never differ.
// Cost: O(window).
#include "core/pair/pair.hpp"
#include "core/pair/window.hpp"

namespace agreed {

/// `growth`: constant or proportional.
[[nodiscard]] ErrorRatio ratio_from_replicates(const Window& window, ErrorGrowth growth);

}  // namespace agreed
