// What a plan rests on: given before configured before seen, and nothing where nothing is known.
#include "daemon/plan/expected.hpp"

#include <cmath>

#include <doctest/doctest.h>

#include "daemon/plan/laws.hpp"

using namespace agreed;
using namespace agreed::plan;

namespace {

constexpr ChartIndex kOnX{0}, kOnY{1};
constexpr ComparisonIndex kComparison{0};
constexpr AnalyzerIndex kX{0}, kY{1};
constexpr MeasurandIndex kProtein{0};

/// One standard on two analyzers, and their comparison.
Settings mill() {
  Settings settings;
  settings.analyzers = {{"line1", ""}, {"line2", ""}};
  settings.measurands.resize(1);
  settings.measurands[0].id = "protein";
  settings.measurands[0].decision_levels = {10, 14};
  settings.measurands[0].allowable = AllowableDifference{0.2, std::nullopt};
  settings.standards = {{"wheat", ""}};
  settings.charts.resize(2);
  settings.charts[1].analyzer = kY;
  for (ChartSettings& chart : settings.charts) {
    chart.every = std::chrono::hours(8);
    chart.level_run_length = chart.precision_run_length = 2000;
    chart.lots.resize(1);
  }
  settings.comparisons.resize(1);
  settings.comparisons[0].id = "protein";
  settings.comparisons[0].y = kY;
  return settings;
}

Seen nothing() {
  Seen seen;
  seen.charts.resize(2);
  seen.comparisons.resize(1);
  return seen;
}

/// sds of 0.02 and 0.03, each from 40 readings.
Seen both_seen() {
  Seen seen = nothing();
  for (std::size_t i = 0; i < 2; ++i) {
    const double sd = i == 0 ? 0.02 : 0.03;
    SeenChart& chart = seen.charts[i];
    chart.readings = 40;
    chart.mean = 12;
    chart.sd = sd;
    chart.degrees_of_freedom = 39;
    chart.repeatability.variance = sd * sd;
    chart.repeatability.degrees_of_freedom = 25;
    chart.repeatability.mean = 12;
  }
  return seen;
}

Wishes given(AnalyzerIndex analyzer, double sd) {
  Wishes wishes;
  wishes.sds[{analyzer, kProtein}] = sd;
  return wishes;
}

}  // namespace

TEST_CASE("neither seen nor given: said, with the name to give") {
  const ExpectedPairs pairs = expected_pairs(mill(), kComparison, {}, nothing());
  CHECK_FALSE(pairs.conditions);
  CHECK(pairs.missing == "line1/protein and line2/protein");
  CHECK(expected_pairs(mill(), kComparison, given(kX, 0.02), nothing()).missing == "line2/protein");
  CHECK(expected_sd(mill(), kOnX, {}, nothing()).source == Source::unknown);
  Seen few = both_seen();
  few.charts[0].degrees_of_freedom = 4;
  CHECK(expected_sd(mill(), kOnX, {}, few).source == Source::unknown);
}

TEST_CASE("seen check standards tell sds, lambda and how well it is known") {
  const ExpectedPairs pairs = expected_pairs(mill(), kComparison, {}, both_seen());
  REQUIRE(pairs.conditions);
  CHECK(pairs.x.value == doctest::Approx(0.02));
  CHECK(pairs.y.value == doctest::Approx(0.03));
  CHECK(pairs.x.degrees_of_freedom == 25);
  CHECK(pairs.conditions->ratio.lambda == doctest::Approx(4.0 / 9));
  CHECK(pairs.conditions->ratio.low < pairs.conditions->ratio.lambda);
  CHECK(pairs.conditions->sd_of_pair() == doctest::Approx(std::hypot(0.02, 0.03)));
  CHECK_FALSE(pairs.samples_seen);
  CHECK(pairs.conditions->samples.mean() == doctest::Approx(12));  // assumed around the decision levels
}

TEST_CASE("an sd that was given goes before what was seen, of its analyzer alone") {
  const ExpectedPairs pairs = expected_pairs(mill(), kComparison, given(kY, 0.05), both_seen());
  CHECK(pairs.x.source == Source::seen);
  CHECK(pairs.y.source == Source::given);
  CHECK(pairs.y.value == 0.05);
  CHECK(pairs.conditions->ratio.lambda == doctest::Approx(0.16));
  CHECK(expected_sd(mill(), kOnX, given(kY, 0.05), both_seen()).value == 0.02);
  CHECK(expected_sd(mill(), kOnY, given(kY, 0.05), both_seen()).value == 0.05);
}

TEST_CASE("the scatter of enough pairs scales both errors, but not one that was given") {
  Seen seen = both_seen();
  seen.comparisons[0].pairs = 50;
  seen.comparisons[0].scatter = 0.054;
  seen.comparisons[0].expected_scatter = 0.036;
  for (int i = 0; i < 50; ++i) seen.comparisons[0].true_values.push_back(11 + 0.05 * i);
  const ExpectedPairs pairs = expected_pairs(mill(), kComparison, {}, seen);
  CHECK(pairs.scatter_seen);
  CHECK(pairs.samples_seen);
  CHECK(pairs.x.value == doctest::Approx(0.03));
  CHECK(pairs.y.value == doctest::Approx(0.045));
  CHECK_FALSE(expected_pairs(mill(), kComparison, given(kX, 0.02), seen).scatter_seen);
  seen.comparisons[0].pairs = 19;
  const ExpectedPairs few = expected_pairs(mill(), kComparison, {}, seen);
  CHECK_FALSE(few.scatter_seen);
  CHECK_FALSE(few.samples_seen);
}

TEST_CASE("sds of the configuration, and a bare lambda with the scatter of the pairs") {
  Settings settings = mill();
  settings.comparisons[0].error_ratio = {.source = ErrorSource::given_sds, .sd_x = 0.01, .sd_y = 0.02};
  const ExpectedPairs sds = expected_pairs(settings, kComparison, {}, nothing());
  CHECK(sds.x.source == Source::configured);
  CHECK(sds.y.value == doctest::Approx(0.02));
  settings.comparisons[0].error_ratio = {.source = ErrorSource::given_lambda, .lambda = 4};
  CHECK(expected_pairs(settings, kComparison, {}, nothing()).missing == "line1/protein and line2/protein");
  Seen seen = nothing();
  seen.comparisons[0].pairs = 50;
  seen.comparisons[0].scatter = std::sqrt(5.0);
  const ExpectedPairs lambda = expected_pairs(settings, kComparison, {}, seen);
  CHECK(lambda.x.value == doctest::Approx(2));  // lambda = 4: 4 + 1 = 5
  CHECK(lambda.y.value == doctest::Approx(1));
}

TEST_CASE("charts with the same limits live by one law in sds unless rounding is coarse") {
  Settings settings = mill();
  CHECK(same_law(law_model(settings, kOnX, 0.02), law_model(settings, kOnY, 0.03)));
  CHECK(same_law(law_model(settings, kOnX, 0.02), law_model(settings, kOnY, std::nullopt)));
  settings.measurands[0].decimals = 2;  // half an sd
  const LawModel coarse = law_model(settings, kOnX, 0.02);
  CHECK_FALSE(same_law(coarse, law_model(settings, kOnY, 0.03)));
  CHECK(coarse.sd == 0.02);
  settings.measurands[0].decimals = 3;
  CHECK(same_law(law_model(settings, kOnX, 0.02), law_model(settings, kOnY, 0.03)));
  settings.charts[1].level_run_length = 3000;
  CHECK_FALSE(same_law(law_model(settings, kOnX, 0.02), law_model(settings, kOnY, 0.03)));
}
