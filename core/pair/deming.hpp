#pragma once
// Purpose: the straight line y = b0 + b1 x through pairs with errors in both.
// Inputs: moments of the pairs; delta = var(y error) / var(x error) = 1 / lambda, finite and > 0.
// Method: Deming regression, W. A. Fuller, Measurement Error Models (1987): slope eq. 1.3.7 in the form that
//   does not cancel (chosen by the sign of d = Syy - delta Sxx), covariance theorem 1.3.1.
// Assumptions: errors independent of each other and of the level, of constant variance (the analytic
//   covariance also takes them for normal; the jackknife does not).
// Accuracy: slope to about 1e-15 relative at every delta; sums of squares of values must not overflow
//   (|value| < 1e75).
// Degenerate: fewer than 3 pairs, no spread, or no direction give a reason instead of a slope.
// Cost: O(1).
#include <cmath>
#include <string_view>

#include "core/pair/moments.hpp"

namespace agreed {

/// Why there is no line.
namespace no_line {
inline constexpr std::string_view too_few_pairs = "too_few_pairs";  ///< fewer than 3
inline constexpr std::string_view no_spread = "no_spread";          ///< all pairs are equal
inline constexpr std::string_view no_direction = "no_direction";    ///< any slope fits as well
inline constexpr std::string_view slope_not_positive =
    "slope_not_positive";  ///< the results do not go together
inline constexpr std::string_view one_pair_decides =
    "one_pair_decides";  ///< without one pair there is no line
inline constexpr std::string_view level_not_positive =
    "level_not_positive";  ///< errors proportional to the level, and a level at or below zero
inline constexpr std::string_view not_converged = "not_converged";  ///< the weights find no rest
}  // namespace no_line

/// The slope alone, of any sign; not finite where there is none. `deming_line` looks after that.
[[nodiscard]] inline double deming_slope(double sxx, double sxy, double syy, double delta) {
  const double d = syy - delta * sxx;
  const double r = std::sqrt(d * d + 4 * delta * sxy * sxy);
  // The textbook form (d + r) / (2 Sxy) alone loses all digits for d << 0; this is its conjugate.
  return d >= 0 ? (d + r) / (2 * sxy) : 2 * delta * sxy / (r - d);
}

/// A line, or in `reason` why there is none.
struct DemingLine {
  std::string_view reason;
  double delta = 1;
  double slope = 1;
  double mean_x = 0;           ///< the line goes through the mean of the pairs
  double mean_difference = 0;  ///< y - x on the line at mean_x

  [[nodiscard]] bool exists() const { return reason.empty(); }
  [[nodiscard]] double intercept() const { return mean_difference - (slope - 1) * mean_x; }
  /// y - x on the line at a level of x.
  [[nodiscard]] double difference_at(double level) const {
    return mean_difference + (slope - 1) * (level - mean_x);
  }
  /// Residual y - b0 - b1 x of a pair given relative to the mean.
  [[nodiscard]] double residual(Point centred) const { return centred.y - slope * centred.x; }
  /// Fitted true value of x of such a pair, relative to the mean.
  [[nodiscard]] double fitted(Point centred) const {
    return (delta * centred.x + slope * centred.y) / (delta + slope * slope);
  }
};

/// Throws std::domain_error for a delta that is not finite and > 0.
[[nodiscard]] DemingLine deming_line(const Moments& moments, double delta);

/// Covariance of (y - x on the line at mean_x, slope): the centred form, in which nothing cancels.
struct LineCovariance {
  double mean = 0, mean_slope = 0, slope = 0;

  /// Variance of y - x on the line, `offset` = level - mean_x.
  [[nodiscard]] double difference_at(double offset) const {
    return mean + 2 * offset * mean_slope + offset * offset * slope;
  }
  /// Covariance of intercept and slope.
  [[nodiscard]] double intercept_slope(double mean_x) const { return mean_slope - mean_x * slope; }
};

/// Fuller's covariance. `residual_variance` = sum of squared residuals / (n - 2). `log_ratio_variance`:
/// variance of ln(delta) when delta is an estimate, else 0 (see `slope_variance_from_ratio`).
[[nodiscard]] LineCovariance analytic_covariance(const Moments& moments, const DemingLine& line,
                                                 double residual_variance, double log_ratio_variance);

/// What an uncertain delta adds to the variance of the slope: (d slope / d ln delta)^2 var(ln delta).
[[nodiscard]] double slope_variance_from_ratio(const Moments& moments, const DemingLine& line,
                                               double log_ratio_variance);

/// Sum of squared residuals over (n - 2), from the residuals: from the sums it would lose 1/(1-r^2). n > 2.
[[nodiscard]] double residual_variance(std::span<const Point> points, const Moments& moments,
                                       const DemingLine& line);

}  // namespace agreed
