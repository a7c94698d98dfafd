#pragma once
// Purpose: everything that is worked out of the window's line at a pair: line, scatter, both covariances, the
//   range of fitted true values.
// Inputs: the window's pairs; the error ratio of the present.
// Method: deming.hpp, jackknife.hpp. Replicates divide the error variances: lambda of the means in the window
//   is lambda times mean(1/kx) / mean(1/ky), which is exact when all pairs have the same numbers.
// Degenerate: `reason` says why there is no fit; a slope that is not positive counts as none (the two
//   results do not go together at all).
// Cost: O(n), about 10 ns a pair.
#include <string>

#include "core/pair/deming.hpp"
#include "core/pair/pair.hpp"
#include "core/pair/window.hpp"

namespace agreed {

struct WindowFit {
  std::string reason;
  Moments moments;
  DemingLine line;
  double residual_variance = 0;              ///< of y - b0 - b1 x
  double log_ratio_variance = 0;             ///< of ln(lambda), 0 when lambda is given
  LineCovariance analytic, jackknife;        ///< the uncertainty of an estimated lambda is in both
  double lowest_true = 0, highest_true = 0;  ///< range of the fitted true values of x

  [[nodiscard]] bool exists() const { return reason.empty(); }
  [[nodiscard]] int degrees_of_freedom() const { return moments.n - 2; }
  [[nodiscard]] bool covers(double level) const { return lowest_true <= level && level <= highest_true; }
};

/// delta = 1 / lambda of the means in the window.
[[nodiscard]] double delta_of_means(double lambda, const Window& window);

[[nodiscard]] WindowFit fit_window(const Window& window, const ErrorRatio& ratio);

/// Variance below which scatter is nothing but the rounding of the results: (1 + slope^2) times 1/12 of the
/// square of the `resolution` (0: not known), and never below the rounding of the arithmetic.
[[nodiscard]] double least_variance(const Moments& moments, double slope, double resolution);

/// Residual of a pair that the line does not know, over its standard error (analytic).
[[nodiscard]] double prediction_residual(const WindowFit& fit, Point pair, double resolution);

/// Residual of a pair of the window over its standard error.
[[nodiscard]] double studentised_residual(const WindowFit& fit, Point pair, double resolution);

}  // namespace agreed
