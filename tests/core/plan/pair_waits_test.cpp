#include "core/plan/pair_waits.hpp"

#include <cmath>
#include <stdexcept>

#include <doctest/doctest.h>

#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;

namespace {
Settings with_run_length(double run_length) {
  Settings settings = harrow_mill();
  settings.comparisons[0].warning_run_length = run_length;
  settings.comparisons[0].outlier_run_length = settings.comparisons[0].scatter_run_length = 2 * run_length;
  return settings;
}

/// Lambda uncertain by a factor of 2 either way, as a bare one in the configuration is.
PairConditions bare() {
  PairConditions c = conditions();
  c.ratio.low /= 2;
  c.ratio.high *= 2;
  return c;
}
}  // namespace

TEST_CASE("the pair chart tells a constant step after 60 pairs: medians of 23 pairs at 1 sd, 6 at 2 sd") {
  // 3-statistics 3.5, of the score alone at h 3.86.
  struct Row {
    double size, median, allowed;
  };
  for (const Row& row : {Row{1, 23, 3}, Row{2, 6, 1}}) {
    const double sd = bare().sd_of_pair();
    PairWaits run(with_run_length(2492), {0}, bare(), {row.size * sd, 60}, {250, 200, 1});
    finish(run);
    REQUIRE(run.drifting().median());
    const Simulated median = *run.drifting().median();
    MESSAGE(row.size << " sd of a pair: " << median.value << " +- " << median.standard_error << ", promised "
                     << row.median);
    CHECK(std::abs(median.value - row.median) <= row.allowed);
  }
}

TEST_CASE("agreement is waited for only where the step can lose it") {
  Settings settings = with_run_length(15'000);
  const Trials trials{20, 300, 1};
  PairWaits within(settings, {0}, conditions(0.02, 0.02), {0.09, 60}, trials);
  CHECK_FALSE(within.may_be_lost());
  finish(within);
  CHECK(within.lost().trials() == 0);
  CHECK(within.drifting().trials() == 20);
  CHECK(within.share_done() == 1);
  PairWaits beyond(settings, {0}, conditions(0.02, 0.02), {-0.2, 60}, trials);
  CHECK(beyond.may_be_lost());
  finish(beyond);
  CHECK(beyond.lost().unnoticed() == 0);
  CHECK(beyond.drifting().unnoticed() == 0);
  // Whichever came first.
  for (int n = 1; n <= 300; ++n)
    CHECK(beyond.either().noticed_within(n).value >=
          std::max(beyond.lost().noticed_within(n).value, beyond.drifting().noticed_within(n).value));
  // Against a line that leaves what is allowable at a level only together with the step.
  settings.comparisons[0].relation = EstablishedLine{-0.13, 1.01};
  CHECK_FALSE(PairWaits(settings, {0}, conditions(), {0.0999, 60}, trials).may_be_lost());
  CHECK(PairWaits(settings, {0}, conditions(), {0.1001, 60}, trials).may_be_lost());
  settings.measurands[0].allowable.reset();
  CHECK_FALSE(PairWaits(settings, {0}, conditions(), {5, 60}, trials).may_be_lost());
}

TEST_CASE("the trial of either alert is that of the run, pair by pair") {
  const Settings settings = with_run_length(2492);
  PairWaits run(settings, {0}, conditions(), {0.25, 40}, {30, 200, 5});
  finish(run);
  const Waits either = waits_of(pair_trial(settings, {0}, conditions(), {0.25, 40}), 30, 200, 5);
  for (int n = 1; n <= 200; ++n) CHECK(either.noticed_within(n) == run.either().noticed_within(n));
}

TEST_CASE("the error ratio may come from the replicates of the samples") {
  Settings settings = with_run_length(2492);
  settings.comparisons[0].error_ratio.source = ErrorSource::replicates;
  PairConditions doubles = conditions();
  doubles.x_replicates = doubles.y_replicates = 2;
  PairWaits run(settings, {0}, doubles, {3 * doubles.sd_of_pair(), 40}, {30, 100, 5});
  finish(run);
  CHECK(run.drifting().unnoticed() == 0);
  CHECK(run.drifting().median()->value <= 5);
}

TEST_CASE("larger steps are told sooner, and both directions alike") {
  const Settings settings = with_run_length(2492);
  const auto median = [&](double size) {
    return waits_of(pair_trial(settings, {0}, conditions(), {size, 60}), 100, 300).median().value().value;
  };
  CHECK(median(0.15) > median(0.3));
  CHECK(median(0.3) > median(0.6));
  CHECK(std::abs(median(0.3) - median(-0.3)) <= 2);
}

TEST_CASE("steps and numbers of trials that are none are refused") {
  const Settings settings = with_run_length(2492);
  CHECK_THROWS_AS(PairWaits(settings, {0}, conditions(), {std::nan(""), 60}, {}), std::invalid_argument);
  CHECK_THROWS_AS(PairWaits(settings, {0}, conditions(), {1, -1}, {}), std::invalid_argument);
  CHECK_THROWS_AS(PairWaits(settings, {0}, conditions(), {1, 60}, {0, 10, 1}), std::invalid_argument);
  CHECK_THROWS_AS(PairWaits(settings, {0}, conditions(0, 1), {1, 60}, {}), std::invalid_argument);
  CHECK_THROWS_AS(PairWaits(settings, {3}, conditions(), {1, 60}, {}), std::out_of_range);
}
