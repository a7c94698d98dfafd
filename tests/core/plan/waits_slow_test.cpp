// The waits of the design with more trials, and of whole comparisons.
#include <cmath>
#include <utility>

#include <doctest/doctest.h>

#include "core/plan/chart_waits.hpp"
#include "core/plan/pair_waits.hpp"
#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;

TEST_CASE("agreement is lost after a step from 0 to 2 A as stated") {
  // 3-statistics 3.4: the window's verdict tells it after 66 / 26 / 15 pairs (A = 0.5 / 1 / 2 sd of a pair);
  // a whole comparison restarts its window at a critical signal of the pair chart, and takes about as long.
  struct Row {
    double allowable;
    int alone;
  };
  for (const Row& row : {Row{0.5, 66}, Row{1, 26}, Row{2, 15}}) {
    Settings settings = shared(harrow_mill(), 6);
    settings.measurands[0].decision_levels = {9.6, 14.4};
    const double sd = conditions().sd_of_pair();
    settings.measurands[0].allowable = AllowableDifference{row.allowable * sd, std::nullopt};
    PairWaits run(settings, {0}, conditions(), {2 * row.allowable * sd, 200}, {400, 400, 1});
    finish(run);
    REQUIRE(run.lost().median());
    MESSAGE("A " << row.allowable << " sd: drifting " << run.drifting().median()->value << ", lost "
                 << run.lost().median()->value << ", by the window alone " << row.alone);
    CHECK(run.lost().median()->value <= row.alone * 1.15);
    CHECK(run.lost().median()->value >= 8);
  }
}

TEST_CASE("waits of a change-point chart with 4,000 trials") {
  Settings settings = harrow_mill();
  settings.charts[0].level_run_length = settings.charts[0].precision_run_length = 1800;
  for (const auto& [size, promised] : {std::pair(0.5, 73.0), std::pair(1.0, 16.0), std::pair(2.0, 4.0)}) {
    const Waits waits = waits_of(chart_trial(settings, {0}, {size, 1, 103}), 4000, 500);
    MESSAGE(size << " sd: " << waits.median()->value << " +- " << waits.median()->standard_error
                 << ", nine in ten " << (waits.quantile(0.9) ? waits.quantile(0.9)->value : -1));
    CHECK(std::abs(waits.median()->value - promised) <= 3 * waits.median()->standard_error + 0.03 * promised);
  }
}
