#include "core/chart/reference.hpp"

#include <cmath>

namespace agreed {

std::optional<double> normalised_error(const ComparedMean& mean, const ReferenceValue& reference) {
  const double given = reference.expanded_uncertainty.value_or(0) / reference.coverage_factor;
  const double u = std::hypot(mean.sd / std::sqrt(static_cast<double>(mean.readings)), given);
  if (!(u > 0)) return {};
  return (mean.mean - reference.value) / (2 * u);
}

std::optional<double> allowed_bias(const ComparedMean& mean, const ReferenceValue& reference, double h) {
  if (mean.readings < kLeastForBias || !reference.expanded_uncertainty) return {};
  return *reference.expanded_uncertainty + h * mean.sd / std::sqrt(static_cast<double>(mean.readings));
}

}  // namespace agreed
