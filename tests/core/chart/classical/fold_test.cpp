// The classical chart as a fold: published worked examples, the life of an alert, replicates in any order.
#include "core/chart/classical/fold.hpp"

#include <cmath>
#include <vector>

#include <doctest/doctest.h>

#include "core/chart/moving_range.hpp"
#include "tests/core/chart/classical/table.hpp"
#include "tests/core/chart/support.hpp"

using namespace agreed;
using namespace agreed::classical;
using agreed::test::hour;

namespace {
ChartSettings chart_of(int baseline) {
  ChartSettings chart;
  chart.method = ChartMethod::classical;
  chart.baseline = baseline;
  return chart;
}

ChartSettings given(double center, double sigma) {
  ChartSettings chart = chart_of(30);
  chart.classical.center = center;
  chart.classical.sigma = sigma;
  return chart;
}

/// A fold fed one run an hour.
struct Fed {
  explicit Fed(const ChartSettings& chart) : fold(chart) {}
  Fold::Change read(double value) { return fold.take(hour(++hours), value); }
  Fold::Change replicate(double value) { return fold.take(hour(hours), value); }
  void feed(const std::vector<double>& values) {
    for (const double value : values) read(value);
  }
  Fold fold;
  std::int64_t hours = 0;
};

bool has(const Fold& fold, ChartSignal signal) {
  return fold.newest().signals.has(signal);
}
}  // namespace

// NIST/SEMATECH e-Handbook 6.3.2.2, flow rate of 10 batches (values from memory; data and results confirm
// each other). The handbook divides by 1.128 and takes 3.267.
TEST_CASE("individuals and moving ranges of the e-Handbook's flow rates") {
  const ChartSettings chart = chart_of(10);
  Fed fed(chart);
  fed.feed({49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6});
  CHECK_FALSE(fed.fold.basis());
  fed.read(52.1);
  REQUIRE(fed.fold.basis());
  CHECK(fed.fold.completes_baseline());
  CHECK_FALSE(fed.fold.alarm());
  const LimitBasis basis = *fed.fold.basis();
  CHECK(std::abs(basis.center - 50.81) < 0.005);
  CHECK(std::abs(basis.sigma - 1.664137226684) < 1e-9);
  CHECK(std::abs(basis.center + 3 * basis.sigma * kD2 / 1.128 - 55.8041) < 5e-5);
  CHECK(std::abs(basis.center - 3 * basis.sigma * kD2 / 1.128 - 45.8159) < 5e-5);
  fed.read(50);
  CHECK(std::abs(*fed.fold.newest().upper - (basis.center + 3 * basis.sigma)) < 1e-12);
  CHECK(std::abs(*fed.fold.newest().moving_range_upper - 6.133821048442) < 1e-9);
  CHECK(std::abs(*fed.fold.newest().moving_range - 2.1) < 1e-12);
  CHECK_FALSE(fed.fold.newest().signals.any());
}

// e-Handbook 6.3.2.3: sums printed with two decimals; the first above 4.1959 is that of the 14th mean.
TEST_CASE("the tabular cumulative sum of the e-Handbook") {
  ChartSettings chart = given(325, 1);
  chart.classical.cusum_allowance = 0.3175;
  chart.classical.cusum_limit = 4.1959;
  Fed fed(chart);
  const double values[] = {324.925, 324.675, 324.725, 324.35,  325.35,  325.225, 324.125,
                           324.525, 325.225, 324.6,   324.625, 325.15,  328.325, 327.25,
                           327.825, 328.5,   326.675, 327.775, 326.875, 328.35};
  const double high[] = {0, 0, 0,    0,    0.03, 0,     0,     0,     0,    0,
                         0, 0, 3.01, 4.94, 7.45, 10.63, 11.99, 14.44, 16.0, 19.04};
  const double low[] = {0, 0.01, 0, 0.33, 0, 0, 0.56, 0.72, 0.17, 0.25, 0.31, 0, 0, 0, 0, 0, 0, 0, 0, 0};
  for (std::size_t i = 0; i < 20; ++i) {
    fed.read(values[i]);
    CAPTURE(i);
    CHECK(std::abs(*fed.fold.newest().cusum_upper - high[i]) < 0.0051);
    CHECK(std::abs(*fed.fold.newest().cusum_lower - low[i]) < 0.0051);
    CHECK(has(fed.fold, ChartSignal::cusum) == (i >= 13));
  }
}

// NIST data archive, CCXBAR.DAT: 20 days of 5 wafers; limits computed independently with exact constants.
TEST_CASE("run means with range and with standard deviation: wafer thickness") {
  const auto rows = test::table("xbar_rs_wafer_thickness.csv");
  struct Expected {
    RunSpread spread;
    double upper, lower, spread_upper;
    int means_outside, spreads_above;
    ChartSignal signal;
  };
  const Expected both[] = {{RunSpread::range, 24.90847963487, 22.54352036513, 4.334723247441, 1, 1,
                            ChartSignal::range_above_limit},
                           {RunSpread::standard_deviation, 24.89732483686, 22.55467516314, 1.714353184233, 1,
                            2, ChartSignal::standard_deviation_above_limit}};
  for (const Expected& expected : both) {
    ChartSettings chart = chart_of(20);
    chart.classical.run_spread = expected.spread;
    Fed fed(chart);
    const auto feed = [&](const std::vector<double>& row) {
      fed.read(row[1]);
      for (std::size_t i = 2; i < row.size(); ++i) fed.replicate(row[i]);
    };
    for (const auto& row : rows) feed(row);
    REQUIRE(fed.fold.basis());
    CHECK(fed.fold.basis()->within_runs);
    CHECK(std::abs(fed.fold.basis()->center - 23.726) < 1e-7);
    // The same days once more, now judged.
    int means = 0, spreads = 0;
    for (const auto& row : rows) {
      feed(row);
      const JudgedRun& run = fed.fold.newest();
      CHECK(run.readings == 5);
      CHECK(std::abs(*run.upper - expected.upper) < 1e-7);
      CHECK(std::abs(*run.lower - expected.lower) < 1e-7);
      CHECK(std::abs(*run.spread_upper - expected.spread_upper) < 1e-7);
      means += run.signals.has(ChartSignal::above_limit) || run.signals.has(ChartSignal::below_limit);
      spreads += run.signals.has(expected.signal);
    }
    CHECK(means == expected.means_outside);
    CHECK(spreads == expected.spreads_above);
  }
}

TEST_CASE("EWMA by its definition, with its exact limits") {
  ChartSettings chart = given(10, 2);
  chart.classical.ewma_weight = 0.2;
  chart.classical.ewma_width = 2.86;
  Fed fed(chart);
  test::Readings next(5);
  std::vector<double> z;
  for (int i = 1; i <= 40; ++i) {
    z.push_back(next());
    fed.read(10 + 2 * z.back());
    double mean = 0, variance = 0;
    for (int j = 0; j < i; ++j) {
      const double share = 0.2 * std::pow(0.8, i - 1 - j);
      mean += share * z[static_cast<std::size_t>(j)];
      variance += share * share;
    }
    const JudgedRun& run = fed.fold.newest();
    CHECK(*run.ewma == doctest::Approx(10 + 2 * mean).epsilon(1e-12));
    CHECK(*run.ewma_upper == doctest::Approx(10 + 2 * 2.86 * std::sqrt(variance)).epsilon(1e-12));
    CHECK(*run.ewma_lower == doctest::Approx(10 - 2 * 2.86 * std::sqrt(variance)).epsilon(1e-12));
    CHECK(has(fed.fold, ChartSignal::ewma) == (std::abs(mean) > 2.86 * std::sqrt(variance)));
  }
}

TEST_CASE("a single reading opens, and readings in a row without a signal end it") {
  ChartSettings chart = given(0, 1);
  Fed fed(chart);
  fed.feed({0.1, -0.2, 0.3});
  CHECK(fed.read(3.1) == Fold::Change::opened);
  CHECK(has(fed.fold, ChartSignal::above_limit));
  REQUIRE(fed.fold.alarm());
  CHECK(fed.fold.alarm()->pattern == Pattern::single_reading);
  CHECK(fed.fold.alarm_started_at() == hour(4));
  CHECK(fed.read(0.2) == Fold::Change::none);
  CHECK(fed.read(0.1) == Fold::Change::none);
  CHECK(fed.read(-3.1) == Fold::Change::none);  // begins the count anew
  CHECK(has(fed.fold, ChartSignal::below_limit));
  CHECK(fed.read(-0.5) == Fold::Change::none);
  CHECK(fed.read(0.1) == Fold::Change::none);
  CHECK(fed.fold.alarm());
  CHECK(fed.read(0.0) == Fold::Change::ended);
  CHECK_FALSE(fed.fold.alarm());
}

TEST_CASE("patterns: the moving range tells scatter, a later shift takes over and dates itself") {
  ChartSettings chart = given(0, 1);
  chart.classical.cusum_allowance = 0.5;
  chart.classical.cusum_limit = 5;
  chart.clear_after = 10;
  Fed fed(chart);
  fed.feed({0, 0, -1.9});
  CHECK(fed.read(1.9) == Fold::Change::opened);  // 3.8 apart, each within the limits
  CHECK(fed.fold.alarm()->pattern == Pattern::scatter);
  fed.feed({-0.2, 1.5, 1.5, 1.5, 1.5});
  REQUIRE(fed.fold.alarm());
  const auto changed = fed.read(1.5);
  CHECK(changed == Fold::Change::pattern_changed);
  CHECK(has(fed.fold, ChartSignal::cusum));
  CHECK(fed.fold.alarm()->pattern == Pattern::shift);
  CHECK(fed.fold.alarm_started_at() == hour(4));
}

TEST_CASE("a shift told by a run rule began with the first reading of the pattern") {
  ChartSettings chart = given(0, 1);
  chart.classical.run_rules.same_side = 9;
  Fed fed(chart);
  fed.feed({-0.5, 0.2, 0.3, 0.4, 0.5, 0.2, 0.3, 0.4, 0.5});
  CHECK_FALSE(fed.fold.alarm());
  CHECK(fed.read(1.2) == Fold::Change::opened);
  CHECK(fed.fold.alarm()->pattern == Pattern::shift);
  CHECK(fed.fold.alarm_started_at() == hour(2));
  CHECK(fed.fold.mean_since_alarm_started() == doctest::Approx(4.0 / 9));
}

TEST_CASE("a run is judged by all its replicates, whatever came first") {
  ChartSettings chart = given(0, 1);
  Fed fed(chart), other(chart);
  fed.feed({0.1, 0.2});
  other.feed({0.1, 0.2});
  CHECK(fed.read(3.4) == Fold::Change::opened);      // alone it is beyond 3
  CHECK(fed.replicate(0.2) == Fold::Change::ended);  // 1.8 is within 3/sqrt(2), 3.2 apart is no scatter
  CHECK(other.read(0.2) == Fold::Change::none);
  CHECK(other.replicate(3.4) == Fold::Change::none);
  CHECK_FALSE(fed.fold.newest().signals.any());
  CHECK(fed.fold.newest().mean == doctest::Approx(other.fold.newest().mean).epsilon(1e-15));
  CHECK(*fed.fold.newest().upper == doctest::Approx(3 / std::sqrt(2.0)));
  CHECK(fed.fold.runs() == 3);
}

TEST_CASE("an intervention begins a new baseline; what was given stays") {
  const ChartSettings learned = chart_of(10), known = given(5, 1);
  Fed one(learned), two(known);
  for (int i = 0; i < 12; ++i) one.read(i % 2), two.read(5);
  one.read(9);
  CHECK(one.fold.alarm());
  one.fold.restart();
  two.fold.restart();
  CHECK_FALSE(one.fold.alarm());
  CHECK_FALSE(one.fold.basis());
  CHECK(one.fold.runs() == 0);
  CHECK(two.fold.basis()->center == doctest::Approx(5));
  for (int i = 0; i < 10; ++i) one.read(100 + i % 2);
  CHECK(one.fold.basis()->center == doctest::Approx(100.5));
}

TEST_CASE("a given centre alone takes sigma from the baseline") {
  ChartSettings chart = chart_of(10);
  chart.classical.center = 3;
  Fed fed(chart);
  for (int i = 0; i < 10; ++i) fed.read(i % 2);
  REQUIRE(fed.fold.basis());
  CHECK(fed.fold.basis()->center == doctest::Approx(3));
  CHECK(fed.fold.basis()->sigma == doctest::Approx(1 / kD2));
}

TEST_CASE("readings that never differ give no limits, until they do") {
  const ChartSettings chart = chart_of(10);
  Fed fed(chart);
  for (int i = 0; i < 30; ++i) fed.read(7);
  CHECK_FALSE(fed.fold.basis());
  CHECK_FALSE(fed.fold.learned());
  fed.read(7.5);
  CHECK(fed.fold.basis());
}

TEST_CASE("without replicates in half of the runs they are taken as individuals") {
  const ChartSettings chart = chart_of(10);
  Fed fed(chart);
  for (int i = 0; i < 10; ++i) {
    fed.read(i % 2);
    if (i < 4) fed.replicate(i % 2 + 0.01);
  }
  CHECK_FALSE(fed.fold.basis()->within_runs);
  fed.read(0.5);
  fed.replicate(0.5);
  CHECK_FALSE(fed.fold.newest().spread);
  CHECK(fed.fold.newest().moving_range_upper);
}
