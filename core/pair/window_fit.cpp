#include "core/pair/window_fit.hpp"

#include <algorithm>
#include <cmath>

#include "core/base/distributions.hpp"
#include "core/pair/jackknife.hpp"

namespace agreed {
namespace {
// Relative size of what the arithmetic itself may leave as a residual of an exact line.
constexpr double kRounding = 1e-12;

// trigamma(nu/2) is the variance of ln(s^2) of a normal sample with nu degrees of freedom.
double log_ratio_variance(const ErrorRatio& ratio) {
  if (!ratio.estimated) return 0;
  double sum = 0;
  for (const double df : {ratio.x.degrees_of_freedom, ratio.y.degrees_of_freedom})
    if (df > 0) sum += trigamma(df / 2);
  return sum;
}

void find_range(std::span<const Point> points, WindowFit& fit) {
  double low = fit.line.fitted(fit.moments.centred(points.front())), high = low;
  for (const Point p : points) {
    const double fitted = fit.line.fitted(fit.moments.centred(p));
    low = std::min(low, fitted);
    high = std::max(high, fitted);
  }
  fit.lowest_true = fit.line.mean_x + low;
  fit.highest_true = fit.line.mean_x + high;
}

// Variance of the line at a pair, as a part of the residual variance: the leverage.
double line_variance(const WindowFit& fit, Point centred) {
  return fit.analytic.difference_at(fit.line.fitted(centred));
}
}  // namespace

double delta_of_means(double lambda, const Window& window) {
  const Point shares = window.error_shares();
  return shares.y / (lambda * shares.x);
}

WindowFit fit_window(const Window& window, const ErrorRatio& ratio) {
  WindowFit fit;
  fit.moments = window.moments();
  if (!ratio.known) {
    fit.reason = ratio.reason.empty() ? "error_ratio_not_known" : ratio.reason;
    return fit;
  }
  fit.line = deming_line(fit.moments, delta_of_means(ratio.lambda, window));
  if (!fit.line.exists()) {
    fit.reason = fit.line.reason;
    return fit;
  }
  if (!(fit.line.slope > 0)) {
    fit.reason = no_line::slope_not_positive;
    return fit;
  }
  const auto jackknife = jackknife_covariance(window.points(), fit.moments, fit.line);
  if (!jackknife) {
    fit.reason = no_line::one_pair_decides;
    return fit;
  }
  fit.log_ratio_variance = log_ratio_variance(ratio);
  fit.residual_variance = residual_variance(window.points(), fit.moments, fit.line);
  fit.analytic = analytic_covariance(fit.moments, fit.line, fit.residual_variance, fit.log_ratio_variance);
  fit.jackknife = *jackknife;
  fit.jackknife.slope += slope_variance_from_ratio(fit.moments, fit.line, fit.log_ratio_variance);
  find_range(window.points(), fit);
  return fit;
}

double least_variance(const Moments& moments, double slope, double resolution) {
  const double size = std::max(std::abs(moments.origin.x), std::abs(moments.origin.y)) +
                      std::sqrt((moments.sxx + moments.syy) / std::max(1, moments.n));
  const double rounding = kRounding * size;
  return std::max((1 + slope * slope) * resolution * resolution / 12, rounding * rounding);
}

double prediction_residual(const WindowFit& fit, Point pair, double resolution) {
  const Point c = fit.moments.centred(pair);
  const double least = least_variance(fit.moments, fit.line.slope, resolution);
  const double variance = std::max(fit.residual_variance, least) + line_variance(fit, c);
  return variance > 0 ? fit.line.residual(c) / std::sqrt(variance) : 0;
}

double studentised_residual(const WindowFit& fit, Point pair, double resolution) {
  const Point c = fit.moments.centred(pair);
  const double s2 = std::max(fit.residual_variance, least_variance(fit.moments, fit.line.slope, resolution));
  // A pair that the line goes through by itself has no residual to speak of.
  const double variance = s2 - std::min(line_variance(fit, c), 0.999 * s2);
  return variance > 0 ? fit.line.residual(c) / std::sqrt(variance) : 0;
}

}  // namespace agreed
