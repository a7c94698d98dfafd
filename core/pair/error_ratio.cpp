#include "core/pair/error_ratio.hpp"

#include <cmath>
#include <utility>

#include "core/base/distributions.hpp"

namespace agreed {
namespace {
constexpr double kUpper = 0.975;   // two-sided 95 % interval
constexpr double kBareFactor = 2;  // what a bare lambda is taken to be uncertain by, either way
}  // namespace

ErrorVariance pooled(std::span<const Repeatability> standards) {
  ErrorVariance sum;
  for (const Repeatability& standard : standards) {
    if (!standard.known()) continue;
    sum.variance += standard.variance * standard.degrees_of_freedom;
    sum.degrees_of_freedom += standard.degrees_of_freedom;
  }
  if (sum.degrees_of_freedom > 0) sum.variance /= sum.degrees_of_freedom;
  return sum;
}

ErrorRatio ratio_of(const ErrorVariance& x, const ErrorVariance& y) {
  ErrorRatio ratio;
  ratio.x = x;
  ratio.y = y;
  if (!(x.degrees_of_freedom > 0 && y.degrees_of_freedom > 0)) {
    ratio.reason = "repeatability_not_known";
    return ratio;
  }
  if (!(x.variance > 0 && y.variance > 0)) {
    ratio.reason = "repeatability_is_zero";
    return ratio;
  }
  ratio.known = ratio.variances_known = ratio.estimated = true;
  ratio.lambda = x.variance / y.variance;
  ratio.low = ratio.lambda / f_quantile(kUpper, x.degrees_of_freedom, y.degrees_of_freedom);
  ratio.high = ratio.lambda * f_quantile(kUpper, y.degrees_of_freedom, x.degrees_of_freedom);
  return ratio;
}

ErrorRatio ratio_of(const ErrorModel& x, const ErrorModel& y, double level) {
  ErrorRatio ratio;
  for (const ErrorModel* model : {&x, &y})
    if (!model->exists()) {
      ratio.reason = model->reason;
      return ratio;
    }
  if (!(x.variance_at(level) > 0 && y.variance_at(level) > 0)) {
    ratio.reason = "repeatability_is_zero";
    return ratio;
  }
  ratio = ratio_of(ErrorVariance{x.variance_at(level), x.degrees_of_freedom_at(level)},
                   ErrorVariance{y.variance_at(level), y.degrees_of_freedom_at(level)});
  ratio.x_model = x;
  ratio.y_model = y;
  ratio.level = level;
  return ratio;
}

double mean_level(std::span<const Repeatability> x, std::span<const Repeatability> y) {
  double sum = 0, df = 0;
  for (const auto& side : {x, y})
    for (const Repeatability& standard : side) {
      sum += standard.mean * standard.degrees_of_freedom;
      df += standard.degrees_of_freedom;
    }
  return df > 0 ? sum / df : 0;
}

ErrorRatio ratio_from_standards(std::span<const Repeatability> x, std::span<const Repeatability> y,
                                ErrorGrowth growth, const std::string& measurand, const std::string& on_x,
                                const std::string& on_y) {
  for (const auto& [standards, analyzer] : {std::pair(x, &on_x), std::pair(y, &on_y)}) {
    const ErrorVariance sum = pooled(standards);
    const std::string to_know = measurand + " on " + *analyzer;
    ErrorRatio unknown;
    if (!(sum.degrees_of_freedom > 0 && sum.variance > 0)) {
      unknown.reason = "too few check readings of " + to_know + " to know its repeatability";
      return unknown;
    }
    if (growth == ErrorGrowth::constant) continue;
    const std::string_view no = fit_error_model(growth, standards).reason;
    if (no == no_model::one_level)
      unknown.reason = "the check standards of " + to_know +
                       " lie at one level, and a mixed error model needs two that are a fifth apart";
    else if (no == no_model::at_zero)
      unknown.reason = "a check standard of " + to_know +
                       " lies at level zero, where an error proportional to the level vanishes";
    if (!unknown.reason.empty()) return unknown;
  }
  if (growth == ErrorGrowth::constant) return ratio_of(pooled(x), pooled(y));
  return ratio_of(fit_error_model(growth, x), fit_error_model(growth, y), mean_level(x, y));
}

ErrorRatio given_ratio(const ErrorRatioSettings& settings, ErrorGrowth growth) {
  ErrorRatio ratio;
  if (settings.source == ErrorSource::given_sds && settings.sd_x > 0 && settings.sd_y > 0) {
    ratio.known = ratio.variances_known = true;
    ratio.x.variance = settings.sd_x * settings.sd_x;
    ratio.y.variance = settings.sd_y * settings.sd_y;
    ratio.lambda = ratio.low = ratio.high = ratio.x.variance / ratio.y.variance;
  } else if (settings.source == ErrorSource::given_lambda && settings.lambda > 0) {
    ratio.known = true;
    ratio.lambda = settings.lambda;
    ratio.low = settings.lambda / kBareFactor;
    ratio.high = settings.lambda * kBareFactor;
    if (growth == ErrorGrowth::proportional) {
      ratio.x_model.growth = ratio.y_model.growth = growth;
      ratio.x_model.at_zero = ratio.y_model.at_zero = 0;
      ratio.x_model.relative = settings.lambda;
      ratio.y_model.relative = 1;
      ratio.level = 1;
    }
  } else {
    ratio.reason = "error_ratio_not_given";
  }
  return ratio;
}

}  // namespace agreed
