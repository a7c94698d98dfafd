#include "core/pair/second_opinion.hpp"

#include <algorithm>
#include <cmath>

#include "core/pair/bias.hpp"

namespace agreed {

bool methods_disagree(std::span<const Point> points, const WindowFit& fit, const PassingBablok& robust,
                      std::span<const double> levels, double t) {
  if (!fit.exists() || !robust.exists() || !robust.slope_interval) return false;
  return std::any_of(levels.begin(), levels.end(), [&](double level) {
    const Bias fitted = bias_at(fit.line, fit.jackknife, level);
    const RobustBias ranked = robust_bias_at(points, robust, level);
    const auto [low, high] = std::minmax({ranked.interval[0], ranked.interval[1], ranked.value});
    return std::abs(ranked.value - fitted.value) > t * fitted.se &&
           (fitted.value < low || fitted.value > high);
  });
}

}  // namespace agreed
