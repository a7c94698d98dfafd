// A whole chart of method classical: findings, view, interventions, repeatability.
#include <cmath>
#include <random>

#include <doctest/doctest.h>

#include "core/chart/classical/constants.hpp"
#include "core/chart/moving_range.hpp"
#include "tests/core/chart/scenario.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
Settings classical_mill(int baseline = 30) {
  Settings settings = mill(1800);
  settings.charts[0].method = ChartMethod::classical;
  settings.charts[0].baseline = baseline;
  settings.charts[0].expected.readings = 58;
  return settings;
}

/// A quiet baseline: 10 +- 0.5 in turn, so centre 10, mean moving range 1.
void feed_baseline(Fed& fed, int count = 30) {
  for (int i = 0; i < count; ++i) fed.read(i % 2 == 0 ? 9.5 : 10.5);
}
}  // namespace

TEST_CASE("limits are frozen with the baseline and no longer move") {
  const Settings settings = classical_mill();
  Fed fed(settings);
  feed_baseline(fed, 29);
  CHECK(fed.chart.state() == ChartState::learning);
  CHECK_FALSE(fed.chart.view().upper_limit);
  fed.read(10.5);
  CHECK(fed.chart.state() == ChartState::stable);
  const ChartView then = fed.chart.view();
  REQUIRE(then.upper_limit);
  CHECK(*then.upper_limit == doctest::Approx(10 + 3 / kD2));
  CHECK(*then.lower_limit == doctest::Approx(10 - 3 / kD2));
  REQUIRE(then.classical);
  CHECK(*then.classical->moving_range_upper == doctest::Approx(classical::kMovingRangeLimit));
  for (int i = 0; i < 50; ++i) fed.read(10.9);
  const ChartView now = fed.chart.view();
  CHECK(*now.upper_limit == *then.upper_limit);
  CHECK(*now.baseline.center == *then.baseline.center);
  CHECK(now.baseline.readings == 30);
  CHECK(*now.points.back().upper == *then.upper_limit);
  CHECK_FALSE(now.points.front().upper);
  CHECK_FALSE(now.change.score);
  CHECK(fed.findings.empty());
}

TEST_CASE("what is told of a reading beyond the limits, and when it is over") {
  const Settings settings = classical_mill();
  Fed fed(settings);
  feed_baseline(fed);
  fed.read(13);
  REQUIRE(fed.findings.size() == 1);
  const Finding& told = fed.findings[0];
  CHECK(told.kind == AlertKind::check_standard_unstable);
  CHECK(told.holds);
  CHECK(told.severity == Severity::warning);
  CHECK(told.at == hour(31));
  CHECK(told.started_at == hour(31));
  CHECK(text_of(told, "method") == "classical");
  CHECK(text_of(told, "pattern") == "single_reading");
  CHECK(number_of(told, "value") == doctest::Approx(13));
  CHECK(number_of(told, "limit_upper") == doctest::Approx(10 + 3 / kD2));
  CHECK(number_of(told, "shift") == doctest::Approx(3));
  CHECK(number_of(told, "readings_since") == doctest::Approx(1));
  CHECK(number_of(told, "expected_run_length") == doctest::Approx(58));
  CHECK(fed.unstable());
  std::vector<Finding> holding;
  fed.chart.conditions(holding);
  REQUIRE(holding.size() == 1);
  CHECK(text_of(holding[0], "pattern") == "single_reading");
  CHECK(fed.chart.view().points.back().signals == std::vector{ChartSignal::above_limit});
  CHECK(fed.chart.view().pattern == "single_reading");
  for (const double value : {10.5, 10.0, 10.0}) fed.read(value);
  REQUIRE(fed.findings.size() == 2);
  CHECK_FALSE(fed.findings[1].holds);
  CHECK(fed.findings[1].resolved_reason == "back_to_normal");
  CHECK(number_of(fed.findings[1], "set_aside") == doctest::Approx(0));
  CHECK_FALSE(fed.unstable());
}

TEST_CASE("a shift smaller than what matters is a notice") {
  Settings settings = classical_mill();
  settings.charts[0].classical.run_rules.same_side = 9;
  settings.charts[0].smallest_shift = 1.5;
  Fed fed(settings);
  feed_baseline(fed);
  for (int i = 0; i < 9; ++i) fed.read(10.6);
  REQUIRE(fed.findings.size() == 1);
  CHECK(text_of(fed.findings[0], "pattern") == "shift");
  CHECK(fed.findings[0].severity == Severity::notice);
  CHECK(fed.findings[0].started_at == hour(31));
  CHECK(number_of(fed.findings[0], "shift") == doctest::Approx(0.6));
}

TEST_CASE("an intervention begins a new baseline and ends the alert; a given centre and sigma stay") {
  Settings settings = classical_mill();
  Fed fed(settings);
  feed_baseline(fed);
  fed.read(13);
  fed.intervene(InterventionKind::recalibrated);
  REQUIRE(fed.findings.size() == 2);
  CHECK(fed.findings[1].resolved_reason == "new_stretch");
  CHECK(fed.chart.state() == ChartState::learning);
  settings.charts[0].classical.center = 10;
  settings.charts[0].classical.sigma = 1;
  Fed given(settings);
  CHECK(given.chart.state() == ChartState::learning);
  given.read(10);
  CHECK(given.chart.state() == ChartState::stable);
  given.intervene(InterventionKind::repaired);
  given.read(13.5);
  CHECK(given.unstable());
  CHECK(given.chart.view().classical->sigma_given);
}

TEST_CASE("repeatability is that of the baseline") {
  const Settings settings = classical_mill();
  Fed fed(settings);
  feed_baseline(fed);
  const Repeatability then = fed.chart.repeatability();
  CHECK(then.variance == doctest::Approx(1 / (kD2 * kD2)));
  CHECK(then.degrees_of_freedom == doctest::Approx(moving_range_degrees_of_freedom(30)));
  fed.read(100);
  CHECK(fed.chart.repeatability().variance == then.variance);
}

TEST_CASE("a long life is bounded, and a copy goes on as the original") {
  Settings settings = classical_mill();
  settings.charts[0].classical.ewma_weight = 0.2;
  settings.charts[0].classical.ewma_width = 2.86;
  settings.charts[0].classical.cusum_allowance = 0.5;
  settings.charts[0].classical.cusum_limit = 5;
  settings.charts[0].classical.run_rules.trend = 6;
  Readings next(3);
  Fed fed(settings);
  feed(fed, next, 2000);
  Chart copy = fed.chart;
  CHECK(fed.chart.view().points.size() == 500);
  std::vector<Finding> findings;
  for (int i = 1; i <= 50; ++i) {
    const CheckReading reading{hour(2000 + i), {0}, {1}, {0}, 0, 10 + next()};
    copy.add(reading, findings);
    fed.chart.add(reading, findings);
  }
  CHECK(copy.view() == fed.chart.view());
  CHECK(fed.chart.view().points.back().classical->ewma);
}

// In control, the fold calls as often as the exact run length says: alerts are openings, so a little less
// often than signals are.
TEST_CASE("openings in control agree with the run length") {
  Settings settings = classical_mill();
  settings.charts[0].classical.center = 10;
  settings.charts[0].classical.sigma = 1;
  Readings next(17);
  Fed fed(settings);
  feed(fed, next, 60'000);
  int openings = 0;
  for (const Finding& finding : fed.findings) openings += finding.holds ? 1 : 0;
  // 105.33 readings to a signal and at least 3 in alert after it.
  const double expected = 60'000 / (105.33 + 3.2);
  CHECK(std::abs(openings - expected) < 3 * std::sqrt(expected));
}
