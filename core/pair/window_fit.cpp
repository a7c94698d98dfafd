#include "core/pair/window_fit.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

#include "core/base/distributions.hpp"
#include "core/pair/jackknife.hpp"
#include "core/pair/weighted_jackknife.hpp"

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

LineMethod method_for(const Window& window, const ErrorRatio& ratio, FitMethod asked) {
  if (!window.has_equal_shares()) return LineMethod::york;
  if (asked == FitMethod::weighted_deming) return LineMethod::weighted_deming;
  return ratio.growth() == ErrorGrowth::constant ? LineMethod::deming : LineMethod::york;
}

ErrorLaw law_of(const ErrorRatio& ratio, FitMethod asked, LineMethod method) {
  ErrorLaw law;
  if (asked == FitMethod::weighted_deming) {
    law = weighted_deming_law(ratio.lambda);
    law.common_level = method == LineMethod::weighted_deming;
    return law;
  }
  law.lambda = ratio.lambda;
  if (ratio.growth() == ErrorGrowth::constant) {
    law.x.at_zero = ratio.lambda;  // against 1 of y
  } else {
    law.x = ratio.x_model;
    law.y = ratio.y_model;
  }
  return law;
}

std::vector<Point> shares_in(const Window& window) {
  std::vector<Point> shares;
  shares.reserve(window.entries().size());
  for (const WindowEntry& entry : window.entries()) shares.push_back({entry.x_share, entry.y_share});
  return shares;
}

Point mean_of(const Moments& moments) {
  return {moments.mean_x(), moments.origin.y + moments.mean.y};
}

void find_range(const Window& window, WindowFit& fit) {
  fit.lowest_true = std::numeric_limits<double>::infinity();
  fit.highest_true = -fit.lowest_true;
  const auto points = window.points();
  const auto entries = window.entries();
  for (std::size_t i = 0; i < points.size(); ++i) {
    const double fitted = fit.fitted(points[i], {entries[i].x_share, entries[i].y_share});
    fit.lowest_true = std::min(fit.lowest_true, fitted);
    fit.highest_true = std::max(fit.highest_true, fitted);
  }
  fit.lowest_true += fit.line.mean_x;
  fit.highest_true += fit.line.mean_x;
}

std::string_view fit_constant(const Window& window, WindowFit& fit) {
  const auto jackknife = jackknife_covariance(window.points(), fit.moments, fit.line);
  if (!jackknife) return no_line::one_pair_decides;
  fit.residual_variance = residual_variance(window.points(), fit.moments, fit.line);
  fit.analytic = analytic_covariance(fit.moments, fit.line, fit.residual_variance, fit.log_ratio_variance);
  fit.jackknife = *jackknife;
  fit.jackknife.slope += slope_variance_from_ratio(fit.moments, fit.line, fit.log_ratio_variance);
  return {};
}

LineCovariance sum_of(const LineCovariance& a, double factor, const LineCovariance& b) {
  return {a.mean + factor * b.mean, a.mean_slope + factor * b.mean_slope, a.slope + factor * b.slope};
}

std::string_view fit_weighted(const Window& window, const ErrorLaw& law, WindowFit& fit) {
  const std::vector<Point> shares = shares_in(window);
  const WeightedPairs pairs(window.points(), shares, law, mean_of(fit.moments));
  const WeightedLine weighted = weighted_line(pairs, fit.line.slope);
  if (!weighted.exists()) return weighted.line.reason;
  if (!(weighted.line.slope > 0)) return no_line::slope_not_positive;
  const auto errors = weighted_errors(pairs, weighted);
  if (!errors) return no_line::one_pair_decides;
  fit.line = weighted.line;
  fit.weighing = pairs.weighing();
  fit.parameters = fit.weighing.parameters_of(fit.line);
  fit.scale = weighted.scale();
  fit.x_error = weighted.x_error;
  fit.x_spread = weighted.x_spread;
  const LineCovariance scaled = sum_of({}, fit.scale, weighted.covariance);
  fit.analytic = sum_of(scaled, fit.log_ratio_variance, errors->of_log_ratio);
  fit.jackknife = sum_of(errors->jackknife, fit.log_ratio_variance, errors->of_log_ratio);
  fit.residual_variance = fit.residual_variance_at(fit.line.mean_x);
  return {};
}

// The line that the weighted fits start from, and that is the fit while the errors are the same for all.
std::string_view deming_of(const Window& window, double lambda, WindowFit& fit) {
  fit.line = deming_line(fit.moments, delta_of_means(lambda, window));
  if (!fit.line.exists()) return fit.line.reason;
  return fit.line.slope > 0 ? std::string_view() : no_line::slope_not_positive;
}

// A pair as the line sees it: its residual, that residual's variance, and the variance of the line there.
struct Seen {
  double residual, variance, line_variance;
};

Seen seen(const WindowFit& fit, Point pair, Point shares, double resolution) {
  const double least = least_variance(fit.moments, fit.line.slope, resolution);
  if (!fit.weighted()) {
    const Point c = fit.moments.centred(pair);
    return {fit.line.residual(c), std::max(fit.residual_variance, least),
            fit.analytic.difference_at(fit.line.fitted(c))};
  }
  const WeighedPair p = fit.weighing(pair, shares, fit.parameters);
  const double offset = p.adjusted + (fit.weighing.origin().x - fit.line.mean_x);
  return {p.residual, std::max(fit.scale / p.weight, least), fit.analytic.difference_at(offset)};
}
}  // namespace

const char* to_string(LineMethod method) {
  switch (method) {
    case LineMethod::deming:
      return "deming";
    case LineMethod::weighted_deming:
      return "weighted_deming";
    case LineMethod::york:
      return "york";
  }
  return "";
}

double WindowFit::residual_variance_at(double level) const {
  if (!weighted()) return residual_variance;
  const PairErrors errors = weighing.errors_at({level, level + line.difference_at(level)});
  const Point shares = weighing.mean_shares();
  return scale * (shares.y * errors.y + line.slope * line.slope * shares.x * errors.x);
}

double WindowFit::residual(Point pair) const {
  if (!weighted()) return line.residual(moments.centred(pair));
  return weighing(pair, weighing.mean_shares(), parameters).residual;
}

double WindowFit::fitted(Point pair, Point shares) const {
  if (!weighted()) return line.fitted(moments.centred(pair));
  return weighing(pair, shares, parameters).adjusted + (weighing.origin().x - line.mean_x);
}

double delta_of_means(double lambda, const Window& window) {
  const Point shares = window.error_shares();
  return shares.y / (lambda * shares.x);
}

WindowFit fit_window(const Window& window, const ErrorRatio& ratio, FitMethod asked) {
  WindowFit fit;
  fit.moments = window.moments();
  if (!ratio.known) {
    fit.reason = ratio.reason.empty() ? "error_ratio_not_known" : ratio.reason;
    return fit;
  }
  fit.reason = deming_of(window, ratio.lambda, fit);
  if (!fit.exists()) return fit;
  fit.log_ratio_variance = log_ratio_variance(ratio);
  fit.method = method_for(window, ratio, asked);
  fit.reason = fit.weighted() ? fit_weighted(window, law_of(ratio, asked, fit.method), fit)
                              : fit_constant(window, fit);
  if (fit.exists()) find_range(window, fit);
  return fit;
}

std::optional<double> slope_at_lambda(const Window& window, const ErrorRatio& ratio, FitMethod asked,
                                      double lambda) {
  WindowFit fit;
  fit.moments = window.moments();
  if (!deming_of(window, lambda, fit).empty()) return std::nullopt;
  const LineMethod method = method_for(window, ratio, asked);
  if (method == LineMethod::deming) return fit.line.slope;
  ErrorRatio there = ratio;
  there.lambda = lambda;
  there.x_model.at_zero *= lambda / ratio.lambda;
  there.x_model.relative *= lambda / ratio.lambda;
  const std::vector<Point> shares = shares_in(window);
  const WeightedPairs pairs(window.points(), shares, law_of(there, asked, method), mean_of(fit.moments));
  const WeightedLine weighted = weighted_line(pairs, fit.line.slope);
  return weighted.exists() ? std::optional(weighted.line.slope) : std::nullopt;
}

double least_variance(const Moments& moments, double slope, double resolution) {
  const double size = std::max(std::abs(moments.origin.x), std::abs(moments.origin.y)) +
                      std::sqrt((moments.sxx + moments.syy) / std::max(1, moments.n));
  const double rounding = kRounding * size;
  return std::max((1 + slope * slope) * resolution * resolution / 12, rounding * rounding);
}

double prediction_residual(const WindowFit& fit, Point pair, Point shares, double resolution) {
  const Seen p = seen(fit, pair, shares, resolution);
  const double variance = p.variance + p.line_variance;
  return variance > 0 ? p.residual / std::sqrt(variance) : 0;
}

double studentised_residual(const WindowFit& fit, Point pair, Point shares, double resolution) {
  const Seen p = seen(fit, pair, shares, resolution);
  // A pair that the line goes through by itself has no residual to speak of.
  const double variance = p.variance - std::min(p.line_variance, 0.999 * p.variance);
  return variance > 0 ? p.residual / std::sqrt(variance) : 0;
}

}  // namespace agreed
