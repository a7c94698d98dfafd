#include "core/plan/expected_line.hpp"

#include <cmath>

#include "core/base/distributions.hpp"

namespace agreed::plan {
namespace {
double log_ratio_variance(const ErrorRatio& ratio) {
  double sum = 0;
  if (!ratio.estimated) return sum;
  for (const double df : {ratio.x.degrees_of_freedom, ratio.y.degrees_of_freedom})
    if (df > 0) sum += trigamma(df / 2);
  return sum;
}

ExpectedLine of_constant_errors(const PairConditions& c, int pairs) {
  const double x_error = c.sd_x * c.sd_x / c.x_replicates, y_error = c.sd_y * c.sd_y / c.y_replicates;
  const double spread = c.samples.sd() * c.samples.sd();
  Moments moments;
  moments.origin = {c.samples.mean(), c.samples.mean()};
  moments.n = pairs;
  moments.sxx = (pairs - 1) * (spread + x_error);
  moments.sxy = (pairs - 1) * spread;
  moments.syy = (pairs - 1) * (spread + y_error);
  const double delta = static_cast<double>(c.x_replicates) / (c.ratio.lambda * c.y_replicates);
  const DemingLine line = deming_line(moments, delta);
  const double residual = y_error + line.slope * line.slope * x_error;
  return {line.exists(), line.mean_x,
          analytic_covariance(moments, line, residual, log_ratio_variance(c.ratio)), line.slope};
}

/// Variance of y - x at a level by the service's model, known in proportion; it makes the weights.
double modelled(const PairConditions& c, FitMethod fit, double level) {
  if (fit == FitMethod::weighted_deming) return level > 0 ? level * level : 0;
  return c.ratio.x_model.variance_at(level) / c.x_replicates +
         c.ratio.y_model.variance_at(level) / c.y_replicates;
}

ExpectedLine of_weighted_fit(const PairConditions& c, FitMethod fit, int pairs) {
  double weights = 0, weighted = 0;
  for (const double level : c.samples.values()) {
    const double variance = modelled(c, fit, level);
    if (!(variance > 0)) return {false, 0, {}, 1};
    weights += 1 / variance;
    weighted += level / variance;
  }
  const double mean = weighted / weights;
  double bread = 0, of_mean = 0, of_both = 0, of_slope = 0;
  for (const double level : c.samples.values()) {
    const double w = 1 / modelled(c, fit, level), off = level - mean;
    const double sd_x = c.sd_x_at(level), sd_y = c.sd_y_at(level);
    const double variance = sd_x * sd_x / c.x_replicates + sd_y * sd_y / c.y_replicates;
    bread += w * off * off;
    of_mean += w * w * variance;
    of_both += w * w * variance * off;
    of_slope += w * w * variance * off * off;
  }
  const double samples = static_cast<double>(c.samples.values().size()) / pairs;
  return {true,
          mean,
          {samples * of_mean / (weights * weights), samples * of_both / (weights * bread),
           samples * of_slope / (bread * bread)},
          1};
}
}  // namespace

ExpectedLine expected_line(const PairConditions& conditions, FitMethod fit, int pairs) {
  const bool constant = conditions.ratio.growth() == ErrorGrowth::constant && fit == FitMethod::deming;
  return constant ? of_constant_errors(conditions, pairs) : of_weighted_fit(conditions, fit, pairs);
}

}  // namespace agreed::plan
