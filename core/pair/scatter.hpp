#pragma once
// Purpose: whether the pairs scatter about the line as the analyzers' repeatability says, and whether the
//   window spans enough to know the line.
// Inputs: a fit that exists; the error ratio with its variances; what replicates leave of them.
// Method: F test of s_vv against sigma_y^2 + b1^2 sigma_x^2, one-sided, degrees of freedom n-2 and those of
// F. E.
//   Satterthwaite, Biometrics Bull. 2 (1946) 110; reliability ratio 1 - sigma_x^2 (n-1)/Sxx (Fuller 1987).
// Degenerate: variances not known (a bare lambda): no scatter block; the x error is then taken from the
//   scatter itself for the reliability ratio.
//   Of weighted fits both variances are those at the mean of the line, the reliability ratio is weighted.
// Cost: O(1), one F tail.
#include <optional>
#include <span>

#include "core/pair/comparison_view.hpp"
#include "core/pair/window_fit.hpp"

namespace agreed {

/// `excess` is left false: it is a test made once per renewal of the window.
[[nodiscard]] std::optional<ScatterView> describe_scatter(const WindowFit& fit, const ErrorRatio& ratio,
                                                          Point error_shares);

[[nodiscard]] RangeView describe_range(const WindowFit& fit, const ErrorRatio& ratio, Point error_shares,
                                       std::span<const double> decision_levels);

}  // namespace agreed
