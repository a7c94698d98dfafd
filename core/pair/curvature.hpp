#pragma once
// Purpose: is the relation of the two analyzers curved, so that no straight line describes it?
// Inputs: the window's pairs and its line.
// Method: F test of the coefficient of w^2 in the residual v on (1, w, w^2), w = fitted true value, on (1,
// n-3)
//   degrees of freedom (least squares, any textbook). Sums about the mean; w is scaled by its spread first.
// Assumptions: errors normal, of constant variance and small against the range, since w itself has an error.
// Degenerate: fewer than 4 pairs, fewer than three different fitted values, or no residual at all: nothing.
// Cost: O(n), one F tail.
#include <optional>
#include <span>

#include "core/pair/window_fit.hpp"

namespace agreed {

/// p of the test that the relation is straight.
[[nodiscard]] std::optional<double> curvature_p(std::span<const Point> points, const WindowFit& fit);

}  // namespace agreed
