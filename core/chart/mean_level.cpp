#include "core/chart/mean_level.hpp"

#include <cmath>

#include "core/base/distributions.hpp"

namespace agreed {
namespace {
constexpr double kTail = 0.025;

double of_mean(const MeanLevel& level) {
  return level.variance / static_cast<double>(level.readings);
}
}  // namespace

std::optional<MeanDifference> difference_of(const MeanLevel& before, const MeanLevel& after) {
  if (before.degrees < 1 || after.degrees < 1 || before.readings < 1 || after.readings < 1) return {};
  const double b = of_mean(before), a = of_mean(after), both = b + a;
  if (!(both > 0)) return {};
  const double b_part = b / both, a_part = a / both;
  const double df = 1 / (b_part * b_part / static_cast<double>(before.degrees) +
                         a_part * a_part / static_cast<double>(after.degrees));
  const double half = t_quantile_of_tail(kTail, df) * std::sqrt(both);
  const double difference = after.mean - before.mean;
  return MeanDifference{difference, difference - half, difference + half, 1 - 2 * kTail};
}

}  // namespace agreed
