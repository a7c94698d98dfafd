#pragma once
// Purpose: do the errors grow with the level, although the line takes them for constant?
// Inputs: the window's pairs and its line.
// Method: Spearman's rank correlation of |residual| with the fitted true value, against 2.6/sqrt(n-1) (about
// the
//   one-sided 0.5 % point of its normal approximation).
// Degenerate: fewer than 40 pairs, or no spread of ranks: no.
// Cost: O(n log n); worked out when shown.
#include <span>

#include "core/pair/window_fit.hpp"

namespace agreed {

/// In [-1, 1]; ties share their mean rank; 0 when either side has no spread. Equal lengths.
[[nodiscard]] double rank_correlation(std::span<const double> a, std::span<const double> b);

[[nodiscard]] bool error_grows_with_level(std::span<const Point> points, const WindowFit& fit);

}  // namespace agreed
