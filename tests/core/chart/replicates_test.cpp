// Runs of replicates: one point a run, and what the replicates tell besides.
#include <doctest/doctest.h>

#include "core/chart/precision_score.hpp"
#include "core/chart/run.hpp"
#include "tests/core/chart/scenario.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
constexpr double kBetween = 0.5, kWithin = 1.0;

// Runs of `replicates` at `mean`, with an error of each run and one of each replicate.
void feed_runs(Fed& fed, Readings& next, int runs, int replicates, double mean = 10,
               double within = kWithin) {
  for (int i = 0; i < runs; ++i) {
    const double of_run = mean + kBetween * next();
    std::vector<double> values;
    for (int k = 0; k < replicates; ++k) values.push_back(of_run + within * next());
    fed.read_run(values);
  }
}

std::vector<CheckReading> readings_of(const std::vector<double>& values) {
  std::vector<CheckReading> readings;
  for (const double value : values)
    readings.push_back({hour(1), {0}, {1}, {0}, static_cast<std::int32_t>(readings.size()), value});
  return readings;
}

double variance(double sd) {
  return sd * sd;
}
}  // namespace

TEST_CASE("a run: mean, scatter and smallest step, also far from zero") {
  const Run one = run_of(readings_of({10.62}));
  CHECK(one.mean == doctest::Approx(10.62));
  CHECK(one.replicates == 1);
  CHECK(one.squares == doctest::Approx(0));
  const double far = 1e9;
  const Run run = run_of(readings_of({far + 1, far + 3, far + 3, far + 7}));
  CHECK(run.mean - far == doctest::Approx(3.5));
  CHECK(run.replicates == 4);
  CHECK(run.squares == doctest::Approx(6.25 + 0.25 + 0.25 + 12.25));
  CHECK(run.step == doctest::Approx(2));
  CHECK(std::isfinite(run_of(readings_of({-1e308, 1e308})).mean));
}

TEST_CASE("a point with replicates shows the run mean, their number and their sd") {
  const Settings settings = mill(1800);
  Fed fed(settings);
  fed.read_run({10, 11, 12});
  fed.read(13);
  const ChartView view = fed.chart.view();
  REQUIRE(view.points.size() == 2);
  CHECK(view.points[0].value == doctest::Approx(11));
  CHECK(view.points[0].replicates == 3);
  CHECK(*view.points[0].within_sd == doctest::Approx(1));
  CHECK(view.points[1].replicates == 1);
  CHECK_FALSE(view.points[1].within_sd);
  CHECK(*view.points[1].moving_range == doctest::Approx(2));
  CHECK(view.baseline.readings == 2);
}

TEST_CASE("a further replicate of a run that is folded is refused: the chart must be folded again") {
  const Settings settings = mill(1800);
  Fed fed(settings);
  fed.read_run({10, 11});
  std::vector<Finding> findings;
  CHECK_THROWS_AS(fed.chart.add(CheckReading{hour(1), {0}, {1}, {0}, 2, 12}, findings),
                  std::invalid_argument);
  CHECK_THROWS_AS(fed.chart.add(std::span<const CheckReading>(), findings), std::invalid_argument);
  const std::vector<CheckReading> two_times = {{hour(2), {0}, {1}, {0}, 0, 1},
                                               {hour(3), {0}, {1}, {0}, 1, 1}};
  CHECK_THROWS_AS(fed.chart.add(two_times, findings), std::invalid_argument);
}

TEST_CASE("repeatability has its two parts; the error of a mean of k follows") {
  const Settings settings = mill(1e9);
  Fed fed(settings);
  Readings next(201);
  feed_runs(fed, next, 2000, 4);
  const Repeatability now = fed.chart.repeatability();
  CHECK(now.within_variance == doctest::Approx(variance(kWithin)).epsilon(0.06));
  CHECK(now.within_degrees_of_freedom == doctest::Approx(6000));
  CHECK(now.variance == doctest::Approx(variance(kWithin) + variance(kBetween)).epsilon(0.06));
  const ReplicatesView view = fed.chart.view().replicates.value();
  CHECK(view.per_run == doctest::Approx(4));
  CHECK(view.within_sd == doctest::Approx(std::sqrt(now.within_variance)));
  CHECK(variance(*view.between_sd) == doctest::Approx(now.variance - now.within_variance));
  // The run means scatter by the between part and a fourth of the within part.
  const double of_means = variance(*fed.chart.view().baseline.sigma);
  CHECK(of_means == doctest::Approx(now.variance - now.within_variance + now.within_variance / 4));
  CHECK(view.tell_precision);
}

TEST_CASE("where run means scatter less than their replicates explain, nothing is left between runs") {
  const Settings settings = mill(1e9);
  Fed fed(settings);
  for (int i = 0; i < 20; ++i) fed.read_run({9, 11.0 + 1e-3 * (i % 3)});
  const Repeatability now = fed.chart.repeatability();
  CHECK(now.variance == doctest::Approx(now.within_variance));
  CHECK(now.degrees_of_freedom == doctest::Approx(20));
  CHECK(*fed.chart.view().replicates->between_sd == doctest::Approx(0));
}

TEST_CASE("single readings have no parts") {
  const Settings settings = mill(1e9);
  Fed fed(settings);
  Readings next(202);
  feed(fed, next, 40);
  CHECK(fed.chart.repeatability().within_degrees_of_freedom == doctest::Approx(0));
  CHECK_FALSE(fed.chart.view().replicates);
}

// By definition: pooled variances within runs, Paulson's z, at least 4 and 1 degrees of freedom.
TEST_CASE("the precision score of replicates, split by split") {
  Readings next(203);
  std::vector<float> scratch;
  Stretch stretch(400, {});
  std::vector<double> squares;
  std::vector<int> counts;
  for (int i = 0; i < 60; ++i) {
    const int k = 2 + i % 3;
    Run run{hour(i), next(), k, 0, 0};
    for (int d = 1; d < k; ++d) run.squares += variance(next());
    squares.push_back(run.squares);
    counts.push_back(k);
    stretch.append(run, i);
    if (!has_precision_splits(stretch)) continue;
    double best = -1e300;
    for (std::size_t split = 1; split < squares.size(); ++split) {
      double s[2] = {0, 0}, df[2] = {0, 0};
      for (std::size_t j = 0; j < squares.size(); ++j) {
        s[j >= split] += squares[j];
        df[j >= split] += counts[j] - 1;
      }
      if (df[0] < 4 || df[1] < 1) continue;
      const double f = (s[1] / df[1]) / (s[0] / df[0]);
      const double a = 2 / (9 * df[1]), b = 2 / (9 * df[0]);
      best = std::max(best, ((1 - b) * std::cbrt(f) - (1 - a)) / std::sqrt(b * std::pow(f, 2.0 / 3) + a));
    }
    CHECK(best_precision_split(stretch, scratch).score == doctest::Approx(best).epsilon(1e-9));
  }
}

TEST_CASE("replicates that scatter three times as much are told as scatter, though run means hardly move") {
  const Settings settings = mill(1800);
  Fed fed(settings);
  Readings next(204);
  feed_runs(fed, next, 60, 3);
  REQUIRE(fed.findings.empty());
  feed_runs(fed, next, 15, 3, 10, 3 * kWithin);
  REQUIRE(fed.unstable());
  std::vector<Finding> now;
  fed.chart.conditions(now);
  REQUIRE(now.size() == 1);
  CHECK(text_of(now[0], "pattern") == "scatter");
  CHECK(number_of(now[0], "ratio_of_sd") == doctest::Approx(3).epsilon(0.3));
  CHECK(number_of(now[0], "sd") == doctest::Approx(kWithin).epsilon(0.2));
  CHECK(number_of(now[0], "replicates") == doctest::Approx(3));
  // It ends, and is set aside.
  feed_runs(fed, next, 60, 3);
  CHECK_FALSE(fed.unstable());
  CHECK(fed.chart.view().baseline.set_aside >= 12);
}

TEST_CASE("a step of run means is told as before, with replicates in the point") {
  const Settings settings = mill(1800);
  Fed fed(settings);
  Readings next(205);
  feed_runs(fed, next, 60, 3);
  REQUIRE(fed.findings.empty());
  feed_runs(fed, next, 20, 3, 13);
  REQUIRE(fed.unstable());
  CHECK(fed.chart.view().pattern == "shift");
}

TEST_CASE("a few replicates among single readings leave precision to the readings") {
  const Settings settings = mill(1800);
  Fed fed(settings);
  Readings next(206);
  feed(fed, next, 40);
  fed.read_run({10, 10.5});
  CHECK_FALSE(fed.chart.view().replicates->tell_precision);
  CHECK(fed.chart.view().precision.score);
}

TEST_CASE("the least variance of a mean of configured resolution is that of its replicates' mean") {
  Stretch stretch(400, 0.1);
  for (int i = 0; i < 6; ++i) stretch.append(Run{hour(i), 10.0 + 0.05 * (i % 2), 4, 0.01, 0.1}, i);
  CHECK(stretch.least_variance() == doctest::Approx(0.01 / 12 / 4));
  CHECK(stretch.least_variance_within() == doctest::Approx(0.01 / 12));
}
