#include "core/pair/error_ratio.hpp"

#include <cmath>

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

ErrorRatio given_ratio(const ErrorRatioSettings& settings) {
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
  } else {
    ratio.reason = "error_ratio_not_given";
  }
  return ratio;
}

}  // namespace agreed
