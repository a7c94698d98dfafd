#pragma once
// Purpose: everything that is worked out of the window's line at a pair: line, scatter, both covariances, the
//   range of fitted true values.
// Inputs: the window's pairs; the error ratio of the present.
// Method: deming.hpp with jackknife.hpp while the errors are the same for all pairs; weighted_line.hpp with
//   weighted_jackknife.hpp when they grow with the level or the pairs have unequal numbers of replicates
//   (weighted Deming when asked for and the replicates are equal, else York's fit). Replicates divide the
//   error variances: lambda of the means in the window is lambda times mean(1/kx) / mean(1/ky), which is
//   exact when all pairs have the same numbers. Of weighted fits all variances rest on the observed scatter:
//   the ones of the law times chi-squared/(n-2).
// Degenerate: `reason` says why there is no fit; a slope that is not positive counts as none (the two
//   results do not go together at all).
// Cost: O(n), about 10 ns a pair; of weighted fits about 0.2 us a pair.
#include <optional>
#include <string>

#include "core/pair/deming.hpp"
#include "core/pair/pair.hpp"
#include "core/pair/weighted_line.hpp"
#include "core/pair/window.hpp"

namespace agreed {

enum class LineMethod { deming, weighted_deming, york };
[[nodiscard]] const char* to_string(LineMethod method);

struct WindowFit {
  std::string reason;
  LineMethod method = LineMethod::deming;
  Moments moments;
  DemingLine line;
  double residual_variance = 0;        ///< of y - b0 - b1 x at the line's mean, of pairs with mean shares
  double log_ratio_variance = 0;       ///< of ln(lambda), 0 when lambda is given
  LineCovariance analytic, jackknife;  ///< the uncertainty of an estimated lambda is in both
  double lowest_true = 0, highest_true = 0;  ///< range of the fitted true values of x

  /// Of weighted fits: the law of the errors, what its variances must be multiplied by to explain the
  /// scatter, weighted mean of the law's variances of x, weighted variance of x, and the line as the weights
  /// see it.
  Weighing weighing;
  double scale = 1, x_error = 0, x_spread = 0;
  LineParameters parameters;

  [[nodiscard]] bool exists() const { return reason.empty(); }
  [[nodiscard]] bool weighted() const { return method != LineMethod::deming; }
  [[nodiscard]] int degrees_of_freedom() const { return moments.n - 2; }
  [[nodiscard]] bool covers(double level) const { return lowest_true <= level && level <= highest_true; }
  /// Variance of y - b0 - b1 x at a level, of pairs with the window's mean numbers of replicates.
  [[nodiscard]] double residual_variance_at(double level) const;
  /// y - b0 - b1 x of a pair.
  [[nodiscard]] double residual(Point pair) const;
  /// Fitted true value of x of a pair, relative to line.mean_x.
  [[nodiscard]] double fitted(Point pair, Point shares) const;
};

/// delta = 1 / lambda of the means in the window.
[[nodiscard]] double delta_of_means(double lambda, const Window& window);

/// The fit by the method asked for: `weighted_deming` takes the errors for proportional to the level.
[[nodiscard]] WindowFit fit_window(const Window& window, const ErrorRatio& ratio,
                                   FitMethod asked = FitMethod::deming);

/// The slope of that fit at another lambda, if there is one.
[[nodiscard]] std::optional<double> slope_at_lambda(const Window& window, const ErrorRatio& ratio,
                                                    FitMethod asked, double lambda);

/// Variance below which scatter is nothing but the rounding of the results: (1 + slope^2) times 1/12 of the
/// square of the `resolution` (0: not known), and never below the rounding of the arithmetic.
[[nodiscard]] double least_variance(const Moments& moments, double slope, double resolution);

/// Residual of a pair that the line does not know, over its standard error (analytic). `shares`: what its
/// replicates leave of the error variances; they count in weighted fits only.
[[nodiscard]] double prediction_residual(const WindowFit& fit, Point pair, Point shares, double resolution);

/// Residual of a pair of the window over its standard error.
[[nodiscard]] double studentised_residual(const WindowFit& fit, Point pair, Point shares, double resolution);

}  // namespace agreed
