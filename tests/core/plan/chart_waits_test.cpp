// Waits of whole charts against what is known of them from elsewhere.
#include "core/plan/chart_waits.hpp"

#include <cmath>
#include <limits>
#include <stdexcept>

#include <doctest/doctest.h>

#include "core/chart/classical/run_length.hpp"
#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;

namespace {
Settings with_run_length(double run_length) {
  Settings settings = harrow_mill();
  settings.charts[0].level_run_length = settings.charts[0].precision_run_length = run_length;
  return settings;
}

Settings classical_known() {
  Settings settings = harrow_mill();
  settings.charts[0].method = ChartMethod::classical;
  settings.charts[0].level_run_length = settings.charts[0].precision_run_length = 1000;
  settings.charts[0].classical.center = 12.25;
  settings.charts[0].classical.sigma = 0.5;
  return settings;
}

/// The mean of waits of which nearly all lie within the horizon, with its standard error: waits are close to
/// geometric, so their sd is close to their mean.
Simulated mean_of(const Waits& waits) {
  double mean = 0;
  for (int n = 0; n < waits.horizon(); ++n) mean += 1 - waits.noticed_within(n).value;
  return {mean, mean / std::sqrt(waits.trials())};
}
}  // namespace

TEST_CASE("a change-point chart: medians of 73, 16 and 4 readings at 0.5, 1 and 2 sd after 103") {
  // 3-statistics 3.2 has 63, 14 and 4 of the level score alone, at the run length 1,800; in a chart a signal
  // must hold with the serial correlation seen as well, which takes about a tenth more.
  struct Row {
    double size, median, allowed;
  };
  for (const Row& row : {Row{0.5, 73, 7}, Row{1, 16, 1.1}, Row{2, 4, 1}, Row{-1, 16, 1.1}}) {
    const Waits waits =
        waits_of(chart_trial(with_run_length(1800), {0}, {0.3 * row.size, 0.3, 103}), 400, 200);
    REQUIRE(waits.median());
    MESSAGE(row.size << " sd: " << waits.median()->value << " +- " << waits.median()->standard_error
                     << ", promised " << row.median);
    CHECK(std::abs(waits.median()->value - row.median) <= row.allowed);
  }
}

TEST_CASE("a classical chart with known centre and sigma has the run lengths of the integral equation") {
  // From the first reading on, as Crowder (J. Qual. Technol. 19 (1987) 98) has it: individuals and moving
  // range.
  for (const double shift : {1.5, 2.0, 3.0}) {
    const Waits waits = waits_of(chart_trial(classical_known(), {0}, {shift * 0.5, 0.5, 0}), 3000, 500);
    const Simulated mean = mean_of(waits);
    const double exact = classical::individuals_run_length(shift);
    MESSAGE(shift << " sigma: " << mean.value << " +- " << mean.standard_error << ", exact " << exact);
    CHECK(std::abs(mean.value - exact) < 3.5 * mean.standard_error);
  }
}

TEST_CASE("single limits follow the geometric law") {
  // A step of 4 sigma: each reading beyond 3 sigma with the chance Phi(1); the moving range adds to it at the
  // step itself.
  const Waits waits = waits_of(chart_trial(classical_known(), {0}, {4 * 0.5, 0.5, 0}), 4000, 50);
  const double chance = 0.8413447460685429;
  CHECK(std::abs(waits.noticed_within(1).value - chance) < 3.5 * waits.noticed_within(1).standard_error);
  CHECK(waits.median()->value == 1);
  CHECK(waits.quantile(0.9)->value == 2);
}

TEST_CASE("in control a chart calls falsely about as often as its two run lengths promise") {
  // Two scores at 300 each: together every 150 readings, from the fifth and about the twentieth reading on;
  // in a chart a little rarer, since a signal of the level must also hold with the serial correlation seen.
  const Waits waits = waits_of(chart_trial(with_run_length(300), {0}, {0, 1, 0}), 500, 2000);
  const Simulated mean = mean_of(waits);
  MESSAGE("mean " << mean.value << " +- " << mean.standard_error);
  CHECK(mean.value > 150);
  CHECK(mean.value < 230);
}

TEST_CASE("the same input gives the same waits, and other luck others") {
  const Trial trial = chart_trial(with_run_length(1800), {0}, {0.3, 0.3, 50});
  const Waits first = waits_of(trial, 50, 200), second = waits_of(trial, 50, 200),
              other = waits_of(trial, 50, 200, 2);
  int different = 0;
  for (int n = 1; n <= 200; ++n) {
    CHECK(first.noticed_within(n) == second.noticed_within(n));
    different += first.noticed_within(n) == other.noticed_within(n) ? 0 : 1;
  }
  CHECK(different > 0);
}

TEST_CASE("what may not matter does not: unit, level, lots and reference values") {
  Settings settings = with_run_length(1800);
  const Waits plain = waits_of(chart_trial(settings, {0}, {1, 1, 60}), 40, 200);
  const Waits scaled = waits_of(chart_trial(settings, {0}, {1024, 1024, 60}), 40, 200);
  Lot lot{"new", Instant{hours(20)}, ReferenceValue{1e9, 1e-3, 2}};
  settings.charts[0].lots.push_back(lot);
  const Waits with_lots = waits_of(chart_trial(settings, {0}, {1, 1, 60}), 40, 200);
  for (int n = 1; n <= 200; ++n) {
    CHECK(plain.noticed_within(n) == scaled.noticed_within(n));
    CHECK(plain.noticed_within(n) == with_lots.noticed_within(n));
  }
}

TEST_CASE("results coarser than their sd are told later") {
  Settings settings = with_run_length(1800);
  const double fine = waits_of(chart_trial(settings, {0}, {0.5, 0.25, 60}), 200, 200).median()->value;
  settings.measurands[0].decimals = 0;
  const double coarse = waits_of(chart_trial(settings, {0}, {0.5, 0.25, 60}), 200, 200).median()->value;
  CHECK(fine < coarse);
}

TEST_CASE("a chart that never gets calm tells no step") {
  // A given sigma twenty times too small: an alert that never ends.
  Settings settings = classical_known();
  settings.charts[0].classical.sigma = 0.025;
  CHECK(waits_of(chart_trial(settings, {0}, {0.5, 0.5, 10}), 5, 20).unnoticed() == 5);
}

TEST_CASE("steps that are none are refused") {
  const Settings settings = with_run_length(1800);
  CHECK_THROWS_AS((void)chart_trial(settings, {0}, {1, 0, 10}), std::invalid_argument);
  CHECK_THROWS_AS((void)chart_trial(settings, {0}, {1, std::nan(""), 10}), std::invalid_argument);
  CHECK_THROWS_AS((void)chart_trial(settings, {0}, {std::numeric_limits<double>::infinity(), 1, 10}),
                  std::invalid_argument);
  CHECK_THROWS_AS((void)chart_trial(settings, {0}, {1, 1, -1}), std::invalid_argument);
  CHECK_THROWS_AS((void)chart_trial(settings, {1}, {1, 1, 10}), std::out_of_range);
}
