#include "core/pair/deming.hpp"

#include <stdexcept>

namespace agreed {
namespace {
struct Discriminant {
  double d, r;
};

Discriminant discriminant(const Moments& m, double delta) {
  const double d = m.syy - delta * m.sxx;
  return {d, std::hypot(d, 2 * std::sqrt(delta) * m.sxy)};
}
}  // namespace

DemingLine deming_line(const Moments& moments, double delta) {
  if (!(std::isfinite(delta) && delta > 0)) throw std::domain_error("delta must be finite and positive");
  DemingLine line;
  line.delta = delta;
  line.mean_x = moments.mean_x();
  line.mean_difference = moments.mean_difference();
  if (moments.n < 3) {
    line.reason = no_line::too_few_pairs;
  } else if (!(moments.sxx > 0 || moments.syy > 0)) {
    line.reason = no_line::no_spread;
  } else {
    const double slope = deming_slope(moments.sxx, moments.sxy, moments.syy, delta);
    if (std::isfinite(slope))
      line.slope = slope;
    else
      line.reason = no_line::no_direction;
  }
  return line;
}

double slope_variance_from_ratio(const Moments& m, const DemingLine& line, double log_ratio_variance) {
  const double r = discriminant(m, line.delta).r;
  if (!(r > 0 && log_ratio_variance > 0)) return 0;
  const double g = line.delta * (m.sxy - line.slope * m.sxx) / r;
  return g * g * log_ratio_variance;
}

LineCovariance analytic_covariance(const Moments& m, const DemingLine& line, double residual_variance,
                                   double log_ratio_variance) {
  const auto [d, r] = discriminant(m, line.delta);
  const double x_error = residual_variance / (line.delta + line.slope * line.slope);
  const double true_variance = (d > 0 ? 2 * m.sxy * m.sxy / (r + d) : (r - d) / (2 * line.delta)) / (m.n - 1);
  LineCovariance covariance;
  covariance.mean = residual_variance / m.n;
  if (true_variance > 0)
    covariance.slope = (true_variance * residual_variance + line.delta * x_error * x_error) /
                       ((m.n - 1) * true_variance * true_variance);
  covariance.slope += slope_variance_from_ratio(m, line, log_ratio_variance);
  return covariance;
}

double residual_variance(std::span<const Point> points, const Moments& moments, const DemingLine& line) {
  double sum = 0;
  for (const Point p : points) {
    const double v = line.residual(moments.centred(p));
    sum += v * v;
  }
  return sum / (moments.n - 2);
}

}  // namespace agreed
