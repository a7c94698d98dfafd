#include "core/pair/pair_weight.hpp"

#include <algorithm>

namespace agreed {
namespace {
constexpr double kLeastVariance = 1e-6;  // of that at the reference level, or at level 1
}

double level_of(const Pair& pair, double lambda) {
  // From x on, so that no digits go when both are large.
  return pair.x + lambda / (1 + lambda) * (pair.y - pair.x);
}

double weight_of(const Pair& pair, const ErrorRatio& ratio, FitMethod fit) {
  const double of_replicates =
      (1 + ratio.lambda) / (1.0 / pair.y_replicates + ratio.lambda / pair.x_replicates);
  const double level = level_of(pair, ratio.lambda);
  if (ratio.growth() == ErrorGrowth::constant)
    return fit == FitMethod::deming ? of_replicates : of_replicates / std::max(level * level, kLeastVariance);
  const double reference = ratio.x_variance_at(ratio.level);
  if (!(reference > 0)) return of_replicates;
  return of_replicates / std::max(ratio.x_variance_at(level) / reference, kLeastVariance);
}

}  // namespace agreed
