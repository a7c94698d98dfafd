#include "core/plan/samples.hpp"

#include <cmath>
#include <limits>
#include <stdexcept>

#include <doctest/doctest.h>

#include "core/base/random_normal.hpp"
#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using doctest::Approx;

TEST_CASE("samples know their mean, spread and ends") {
  const SampleValues values({1e6 + 3, 1e6 + 1, 1e6 + 5, 1e6 + 3});
  CHECK(values.lowest() == 1e6 + 1);
  CHECK(values.highest() == 1e6 + 5);
  CHECK(values.mean() == Approx(1e6 + 3).epsilon(1e-15));
  CHECK(values.sd() == Approx(std::sqrt(2.0)).epsilon(1e-12));
  const SampleValues even = SampleValues::evenly(9, 15);
  CHECK(even.values().size() == 101);
  CHECK(even.lowest() == 9);
  CHECK(even.highest() == 15);
  // Of N even values: range sqrt((N + 1) / (12 (N - 1))).
  CHECK(even.sd() == Approx(6 * std::sqrt(102.0 / (12 * 100))).epsilon(1e-12));
}

TEST_CASE("the chance to cover a level is that of drawn samples") {
  const SampleValues values({1, 2, 3, 4, 5, 6, 7, 8, 9, 10});
  RandomNormal draw(5);
  for (const double level : {0.5, 1.0, 1.5, 2.0, 5.0, 9.0, 10.0, 10.5})
    for (const int n : {1, 3, 12}) {
      int covered = 0;
      constexpr int runs = 4000;
      for (int run = 0; run < runs; ++run) {
        bool low = false, high = false;
        for (int i = 0; i < n; ++i) {
          const double value = 1 + std::floor(draw.uniform() * 10);
          low = low || value <= level;
          high = high || value >= level;
        }
        covered += low && high ? 1 : 0;
      }
      CAPTURE(level);
      CAPTURE(n);
      const double chance = values.chance_to_cover(level, n);
      CHECK(std::abs(chance - static_cast<double>(covered) / runs) <=
            3.5 * std::sqrt(chance * (1 - chance) / runs) + 1e-9);
    }
}

TEST_CASE("without samples a tenth is assumed to lie beyond the outer levels") {
  const std::vector<double> two{13.0, 10.5}, one{14.5}, zero{0};
  const SampleValues around = *around_levels(two);
  CHECK(around.lowest() == Approx(10.5 - 2.5 / 8));
  CHECK(around.highest() == Approx(13 + 2.5 / 8));
  CHECK(around_levels(one)->lowest() == Approx(13.05));
  CHECK(around_levels(one)->highest() == Approx(15.95));
  CHECK_FALSE(around_levels(zero));
  CHECK_FALSE(around_levels({}));
}

TEST_CASE("samples that say nothing are refused") {
  CHECK_THROWS_AS(SampleValues({}), std::invalid_argument);
  CHECK_THROWS_AS(SampleValues({3}), std::invalid_argument);
  CHECK_THROWS_AS(SampleValues({3, 3, 3}), std::invalid_argument);
  CHECK_THROWS_AS(SampleValues({3, std::numeric_limits<double>::infinity()}), std::invalid_argument);
  CHECK_THROWS_AS((void)SampleValues::evenly(2, 2), std::invalid_argument);
}

TEST_CASE("drawn pairs have the errors that were asked for") {
  PairConditions growing = test::conditions(0.2, 0.1);
  growing.samples = SampleValues({10, 20});
  growing.ratio.x_model = {ErrorGrowth::proportional, {}, 0, 1};
  growing.x_replicates = 4;
  growing.y_replicates = 2;
  CHECK(growing.sd_x_at(15) == Approx(0.2));
  CHECK(growing.sd_x_at(20) == Approx(0.2 * 20 / 15));
  CHECK(growing.sd_y_at(20) == Approx(0.1));
  CHECK(growing.sd_of_pair() == Approx(std::sqrt(0.04 / 4 + 0.01 / 2)));
  CHECK(growing.with_errors(0.5).sd_x_at(20) == Approx(0.1 * 20 / 15));
  RandomNormal draw(11);
  double x_error = 0, y_error = 0, within_x = 0, within_y = 0, shift = 0;
  int n = 0;
  for (int i = 0; i < 20'000; ++i) {
    const Pair pair = draw_pair(growing, {1, 2}, 0.5, 0, Instant{}, draw);
    const double truth = pair.x < 15 ? 10 : 20;
    if (truth < 15) continue;
    ++n;
    x_error += (pair.x - truth) * (pair.x - truth);
    const double off = pair.y - (1 + 2 * truth + 0.5);
    y_error += off * off;
    shift += off;
    within_x += pair.x_squares;
    within_y += pair.y_squares;
  }
  CHECK(n == Approx(10'000).epsilon(0.03));
  CHECK(std::abs(shift / n) < 4 * 0.1 / std::sqrt(2.0 * n));
  const double at_twenty = 0.2 * 20 / 15;
  CHECK(x_error / n == Approx(at_twenty * at_twenty / 4).epsilon(0.05));
  CHECK(y_error / n == Approx(0.01 / 2).epsilon(0.05));
  CHECK(within_x / n / 3 == Approx(at_twenty * at_twenty).epsilon(0.05));
  CHECK(within_y / n == Approx(0.01).epsilon(0.05));
}

TEST_CASE("results come in the steps of their decimals") {
  RandomNormal draw(12);
  for (int i = 0; i < 100; ++i) {
    const Pair pair = draw_pair(test::conditions(), {}, 0, 0.5, Instant{}, draw);
    CHECK(std::remainder(pair.x, 0.5) == 0);
    CHECK(std::remainder(pair.y, 0.5) == 0);
  }
}

TEST_CASE("an estimated error ratio is known with the scatter of an F ratio, a given one exactly") {
  ErrorRatio ratio = test::conditions(0.2, 0.1).ratio;
  RandomNormal draw(13);
  CHECK(ratio_as_known(ratio, draw) == ratio);
  ratio.estimated = true;
  ratio.x.degrees_of_freedom = 20;
  ratio.y.degrees_of_freedom = 50;
  double sum = 0, ratio_of_bounds = 0;
  constexpr int runs = 20'000;
  for (int i = 0; i < runs; ++i) {
    const ErrorRatio known = ratio_as_known(ratio, draw);
    sum += known.lambda / 4 / runs;
    ratio_of_bounds += known.high / known.lambda / runs;
  }
  // The mean of F on (20, 50) is 50/48, its variance 2 n2^2 (n1 + n2 - 2) / (n1 (n2 - 2)^2 (n2 - 4)).
  CHECK(std::abs(sum - 50.0 / 48) < 4 * std::sqrt(2 * 2500.0 * 68 / (20 * 48.0 * 48 * 46) / runs));
  CHECK(ratio_of_bounds == Approx(1));
}

TEST_CASE("conditions that make no pairs are refused") {
  PairConditions bad = test::conditions();
  bad.sd_x = 0;
  CHECK_THROWS_AS(require_valid(bad), std::invalid_argument);
  bad = test::conditions();
  bad.sd_y = std::nan("");
  CHECK_THROWS_AS(require_valid(bad), std::invalid_argument);
  bad = test::conditions();
  bad.ratio.known = false;
  CHECK_THROWS_AS(require_valid(bad), std::invalid_argument);
  bad = test::conditions();
  bad.y_replicates = 0;
  CHECK_THROWS_AS(require_valid(bad), std::invalid_argument);
  bad = test::conditions();
  bad.samples = SampleValues({-1, 1});
  bad.ratio.x_model = {ErrorGrowth::proportional, {}, 0, 1};
  CHECK_THROWS_AS(require_valid(bad), std::invalid_argument);
}
