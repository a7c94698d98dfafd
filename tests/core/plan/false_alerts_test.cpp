#include "core/plan/false_alerts.hpp"

#include <cmath>

#include <doctest/doctest.h>

#include "tests/core/plan/random_plants.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;
using doctest::Approx;

TEST_CASE("the worked example of the alarm budget: 8 charts and 2 comparisons share six a year") {
  // 3-statistics 3.0: 3,650 readings of each score of a chart read every 8 h.
  Settings settings = harrow_mill();
  settings.charts.assign(8, settings.charts[0]);
  settings.comparisons.assign(2, settings.comparisons[0]);
  settings = shared(settings, 6);
  const FalseAlerts all = false_alerts(settings);
  REQUIRE(all.charts.size() == 8);
  REQUIRE(all.charts[3].level);
  CHECK(all.charts[3].chart == ChartIndex{3});
  CHECK(all.charts[3].level->run_length == Approx(3650));
  CHECK(all.charts[3].level->per_year.value == Approx(0.3));
  CHECK(all.charts[3].per_year.value == Approx(0.6));
  CHECK_FALSE(all.charts[3].limits);
  CHECK_FALSE(all.charts[3].own);
  CHECK(all.comparisons[1].warning.run_length == Approx(14'600));
  CHECK(all.comparisons[1].critical.run_length == Approx(146'000));
  CHECK(all.comparisons[1].critical.extrapolated);
  CHECK_FALSE(all.comparisons[1].warning.extrapolated);
  CHECK(all.comparisons[1].per_year.value == Approx(0.6));
  CHECK(all.per_year.value == Approx(6));
  CHECK(all.by_kind.at("check_standard_unstable").value == Approx(4.8));
  CHECK(all.by_kind.at("pair_outlier").value == Approx(0.3));
  CHECK(all.by_kind.at("pair_outlier").standard_error == 0);
  // One per cent of each table: 8 charts of 0.3 a year by each of two scores, two pair charts of 0.3.
  CHECK(all.charts[0].per_year.standard_error == Approx(0.003 * std::sqrt(2.0)));
  CHECK(all.by_kind.at("check_standard_unstable").standard_error == Approx(0.024 * std::sqrt(2.0)));
  CHECK(all.per_year.standard_error == Approx(std::sqrt(2 * 0.024 * 0.024 + 0.006 * 0.006)));
}

TEST_CASE("the sums are those of the alarm budget, on random plants") {
  RandomNormal draw(31);
  for (int plant = 0; plant < 300; ++plant) {
    const Settings settings = random_plant(draw);
    const FalseAlerts all = false_alerts(settings);
    CHECK(all.per_year.value == Approx(settings.alarm_budget.expected_per_year).epsilon(1e-12));
    double parts = 0, errors = 0;
    for (const auto& chart : all.charts)
      parts += chart.per_year.value, errors += chart.per_year.standard_error;
    for (const auto& comparison : all.comparisons)
      parts += comparison.per_year.value, errors += comparison.per_year.standard_error;
    CHECK(parts == Approx(all.per_year.value).epsilon(1e-12));
    CHECK(all.per_year.standard_error <= 2 * errors + 1e-12);
    double kinds = 0;
    for (const auto& [kind, rate] : all.by_kind) {
      kinds += rate.value;
      const auto found = settings.alarm_budget.by_kind.find(kind);
      CHECK(rate.value ==
            Approx(found == settings.alarm_budget.by_kind.end() ? 0 : found->second).epsilon(1e-12));
    }
    CHECK(kinds == Approx(all.per_year.value).epsilon(1e-12));
  }
}

TEST_CASE("a classical chart has what its limits make it, with the error of its simulation") {
  Settings settings = harrow_mill();
  settings.charts[0].method = ChartMethod::classical;
  settings.charts[0].expected.readings = 200;
  settings.charts[0].expected.standard_error = 4;
  const FalseAlerts all = false_alerts(shared(settings, 6));
  REQUIRE(all.charts[0].limits);
  CHECK(all.charts[0].classical);
  CHECK_FALSE(all.charts[0].level);
  CHECK(all.charts[0].per_year.value == Approx(1095.0 / 200));
  CHECK(all.charts[0].per_year.standard_error == Approx(1095.0 / 200 * 0.02));
}

TEST_CASE("tests that are not made call nothing falsely") {
  Settings settings = harrow_mill();
  settings.comparisons[0].set_outliers_aside = false;
  settings.comparisons[0].error_ratio.source = ErrorSource::given_lambda;
  settings.comparisons[0].own_run_length = 5000;
  const FalseAlerts all = false_alerts(shared(settings, 6));
  CHECK_FALSE(all.comparisons[0].outlier);
  CHECK_FALSE(all.comparisons[0].scatter);
  CHECK(all.comparisons[0].own);
  CHECK(all.comparisons[0].per_year.value == Approx(4380.0 / 5000));
  CHECK(all.by_kind.count("pair_outlier") == 0);
}
