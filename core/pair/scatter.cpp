#include "core/pair/scatter.hpp"

#include <algorithm>
#include <cmath>

#include "core/base/distributions.hpp"

namespace agreed {
namespace {
constexpr double kAdequate = 0.95;  // reliability ratio that counts as adequate: a stated choice
// Sds given in the configuration count as exact; the F distribution is then that of very many degrees of
// freedom.
constexpr double kExact = 1e9;

double given_or_exact(double df) {
  return df > 0 ? df : kExact;
}

ErrorVariance variance_at(const ErrorVariance& constant, const ErrorModel& model, double level) {
  if (model.growth == ErrorGrowth::constant) return constant;
  return {model.variance_at(level), model.degrees_of_freedom_at(level)};
}

// What the x error is of the variance of x; not finite without spread.
double error_part(const WindowFit& fit, const ErrorRatio& ratio, Point error_shares) {
  const double slope = fit.line.slope;
  const double x_error = ratio.variances_known ? ratio.x.variance * error_shares.x
                                               : fit.residual_variance / (fit.line.delta + slope * slope);
  return x_error * (fit.moments.n - 1) / fit.moments.sxx;
}

// The same of a weighted fit, whose law may know the variances in proportion only.
double weighted_error_part(const WindowFit& fit, const ErrorRatio& ratio) {
  const double of_law = fit.weighing.law().x.variance_at(ratio.level);
  const double unit = ratio.variances_known ? ratio.x.variance / of_law : fit.scale;
  return unit * fit.x_error / fit.x_spread;
}
}  // namespace

std::optional<ScatterView> describe_scatter(const WindowFit& fit, const ErrorRatio& ratio,
                                            Point error_shares) {
  if (!ratio.variances_known) return std::nullopt;
  const double x = fit.line.mean_x, y = x + fit.line.mean_difference;
  const ErrorVariance x_error = variance_at(ratio.x, ratio.x_model, x);
  const ErrorVariance y_error = variance_at(ratio.y, ratio.y_model, y);
  const double of_y = y_error.variance * error_shares.y;
  const double of_x = fit.line.slope * fit.line.slope * x_error.variance * error_shares.x;
  const double expected = of_y + of_x;
  if (!(expected > 0)) return std::nullopt;
  const double df = expected * expected /
                    (of_y * of_y / given_or_exact(y_error.degrees_of_freedom) +
                     of_x * of_x / given_or_exact(x_error.degrees_of_freedom));
  ScatterView view;
  view.observed_sd = std::sqrt(fit.residual_variance);
  view.expected_sd = std::sqrt(expected);
  view.variance_ratio = fit.residual_variance / expected;
  view.p = f_tail(view.variance_ratio, fit.degrees_of_freedom(), df);
  return view;
}

RangeView describe_range(const WindowFit& fit, const ErrorRatio& ratio, Point error_shares,
                         std::span<const double> decision_levels) {
  RangeView view;
  const double part = fit.weighted() ? weighted_error_part(fit, ratio) : error_part(fit, ratio, error_shares);
  if (std::isfinite(part)) view.reliability_ratio = std::clamp(1 - part, 0.0, 1.0);
  view.adequate = view.reliability_ratio >= kAdequate;
  view.covers_levels = !decision_levels.empty() && std::all_of(decision_levels.begin(), decision_levels.end(),
                                                               [&](double l) { return fit.covers(l); });
  return view;
}

}  // namespace agreed
