#include "core/pair/pair_weight.hpp"

#include <algorithm>

namespace agreed {
namespace {
constexpr double kLeastVariance = 1e-6;  // of that at the reference level
}

double level_of(const Pair& pair, double lambda) {
  // From x on, so that no digits go when both are large.
  return pair.x + lambda / (1 + lambda) * (pair.y - pair.x);
}

double weight_of(const Pair& pair, const ErrorRatio& ratio) {
  const double of_replicates =
      (1 + ratio.lambda) / (1.0 / pair.y_replicates + ratio.lambda / pair.x_replicates);
  const double reference = ratio.x_variance_at(ratio.level);
  if (ratio.growth() == ErrorGrowth::constant || !(reference > 0)) return of_replicates;
  const double here = ratio.x_variance_at(level_of(pair, ratio.lambda)) / reference;
  return of_replicates / std::max(here, kLeastVariance);
}

}  // namespace agreed
