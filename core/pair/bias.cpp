#include "core/pair/bias.hpp"

#include <algorithm>
#include <cmath>

#include "core/base/distributions.hpp"

namespace agreed {
namespace {
constexpr double kSingleResultTail = 0.025;  // limits for 95 % of single differences
// A determinant below this part of the product of the variances is rounding.
constexpr double kSingular = 1e-14;
}  // namespace

Bias bias_at(const DemingLine& line, const LineCovariance& covariance, double level) {
  const double variance = covariance.difference_at(level - line.mean_x);
  return {line.difference_at(level), std::sqrt(std::max(0.0, variance))};
}

Position position_of(Bias bias, double t, double allowable) {
  const double low = bias.value - t * bias.se, high = bias.value + t * bias.se;
  if (low >= -allowable && high <= allowable) return Position::inside;
  if (low > allowable) return Position::above;
  if (high < -allowable) return Position::below;
  return Position::across;
}

double identity_p(const DemingLine& line, const LineCovariance& v, int n) {
  const double a = line.mean_difference, b = line.slope - 1;
  const double determinant = v.mean * v.slope - v.mean_slope * v.mean_slope;
  if (!(determinant > kSingular * v.mean * v.slope)) return std::abs(a) + std::abs(b) > 0 ? 0 : 1;
  const double quadratic = (a * a * v.slope - 2 * a * b * v.mean_slope + b * b * v.mean) / determinant;
  return f_tail(std::max(0.0, quadratic / 2), 2, n - 2);
}

SingleResult single_result(double bias, double residual_variance, int df, double allowable) {
  const double s = std::sqrt(residual_variance);
  if (!(s > 0)) return {std::abs(bias) <= allowable ? 1.0 : 0.0, bias, bias};
  const double t = t_quantile_of_tail(kSingleResultTail, df);
  const double share = normal_cdf((allowable - bias) / s) - normal_cdf((-allowable - bias) / s);
  return {std::clamp(share, 0.0, 1.0), bias - t * s, bias + t * s};
}

}  // namespace agreed
