#pragma once
// Purpose: do the fitted line and the line by ranks tell the same bias at the decision levels?
// Inputs: the window's pairs, both lines, the decision levels; t of the fitted line's intervals.
// Method: own rule. They disagree at a level when each line's bias lies outside the other's interval there
//   (fitted: bias +- t se; by ranks: robust_bias_at). Both come from the same pairs, so by chance they part
//   far less than either is uncertain; when they do, a few pairs pull the fitted line, or it is no straight
//   line.
// Degenerate: a line or an interval that does not exist disagrees with nothing.
// Cost: O(n) a level.
#include <span>

#include "core/pair/passing_bablok.hpp"
#include "core/pair/window_fit.hpp"

namespace agreed {

[[nodiscard]] bool methods_disagree(std::span<const Point> points, const WindowFit& fit,
                                    const PassingBablok& robust, std::span<const double> levels, double t);

}  // namespace agreed
