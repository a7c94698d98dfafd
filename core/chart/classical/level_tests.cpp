#include "core/chart/classical/level_tests.hpp"

#include "core/chart/classical/constants.hpp"

namespace agreed::classical {
namespace {
void add(Signals& signals, const RulesMet& met) {
  signals.add(ChartSignal::same_side, met.same_side);
  signals.add(ChartSignal::trend, met.trend);
  signals.add(ChartSignal::two_of_three_beyond, met.two_of_three_beyond);
  signals.add(ChartSignal::four_of_five_beyond, met.four_of_five_beyond);
  signals.add(ChartSignal::alternating, met.alternating);
  signals.add(ChartSignal::near_centre, met.near_centre);
  signals.add(ChartSignal::away_from_centre, met.away_from_centre);
}
}  // namespace

// Where several tell a shift, the cumulative sum's estimate of its start is taken, then the EWMA's, then the
// length of the run rule's pattern.
LevelTests::Result LevelTests::take(double z, const ClassicalSettings& chosen) {
  Result result;
  result.signals.add(ChartSignal::above_limit, z > kLimitWidth);
  result.signals.add(ChartSignal::below_limit, z < -kLimitWidth);
  const RulesMet met = rules.take(z, chosen.run_rules);
  if (met.any()) {
    add(result.signals, met);
    result.readings = rules.readings(met, chosen.run_rules);
  }
  if (chosen.ewma_weight && chosen.ewma_width) {
    ewma.take(z, *chosen.ewma_weight);
    if (std::abs(ewma.value) > ewma.limit(*chosen.ewma_weight, *chosen.ewma_width)) {
      result.signals.add(ChartSignal::ewma);
      result.readings = ewma.on_side;
    }
  }
  if (chosen.cusum_allowance && chosen.cusum_limit) {
    cusum.take(z, *chosen.cusum_allowance);
    if (cusum.beyond(*chosen.cusum_limit)) {
      result.signals.add(ChartSignal::cusum);
      result.readings = cusum.upper > *chosen.cusum_limit ? cusum.upper_for : cusum.lower_for;
    }
  }
  if (!result.signals.shift()) result.readings = 1;
  return result;
}

}  // namespace agreed::classical
