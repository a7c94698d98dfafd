// The change scores against their definitions, split by split.
#include <doctest/doctest.h>

#include "core/base/distributions.hpp"
#include "core/chart/level_score.hpp"
#include "core/chart/precision_score.hpp"
#include "core/chart/serial_correlation.hpp"
#include "support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
// Readings at a level far from zero, with a step or more scatter at a random moment, rounded or not.
std::vector<double> random_readings(std::mt19937_64& engine, bool rounded) {
  std::normal_distribution<double> normal;
  std::uniform_int_distribution<std::size_t> length(7, 150);
  std::uniform_real_distribution<double> uniform;
  const std::size_t n = length(engine);
  const auto change = static_cast<std::size_t>(uniform(engine) * static_cast<double>(n));
  const double step = 2 * normal(engine), scatter = 0.5 + 2 * uniform(engine);
  std::vector<double> values;
  for (std::size_t i = 0; i < n; ++i) {
    double value = normal(engine) * (i < change ? 1 : scatter) + (i < change ? 0 : step);
    if (rounded) value = std::round(value);
    values.push_back(10.62 + 0.02 * value);
  }
  return values;
}
}  // namespace

TEST_CASE("level score equals its definition at the best split, block or not") {
  std::mt19937_64 engine(20260105);
  std::printf("seed 20260105\n");
  for (int run = 0; run < 400; ++run) {
    const auto values = random_readings(engine, run % 2 == 1);
    const int memory = run % 3 == 0 ? 20 : 400;
    const double resolution = smallest_step(values);
    const BestSplit expected = level_by_definition(values, resolution, static_cast<std::size_t>(memory));
    const LevelSplit found = best_level_split(stretch_of(values, memory));
    CAPTURE(run);
    CHECK(found.t == doctest::Approx(expected.value).epsilon(1e-8));
    CHECK(found.before == static_cast<std::int64_t>(expected.before));
    CHECK(found.count == static_cast<std::int64_t>(values.size()));
  }
}

TEST_CASE("precision score equals its definition at the best split, block or not") {
  std::mt19937_64 engine(20260106);
  std::printf("seed 20260106\n");
  std::vector<float> scratch;
  for (int run = 0; run < 400; ++run) {
    const auto values = random_readings(engine, run % 2 == 1);
    const int memory = run % 3 == 0 ? 20 : 400;
    const double resolution = smallest_step(values);
    const BestSplit expected = precision_by_definition(values, resolution, static_cast<std::size_t>(memory));
    const PrecisionSplit found = best_precision_split(stretch_of(values, memory), scratch);
    CAPTURE(run);
    CHECK(found.score == doctest::Approx(expected.value).epsilon(1e-8));
    if (run % 2 == 0) CHECK(found.before == static_cast<std::int64_t>(expected.before));
  }
}

TEST_CASE("one reading after the split: the limits drawn are exactly where the score reaches h") {
  const double h = 3.89;
  for (const std::size_t n : {5U, 12U, 60U, 299U, 302U, 390U}) {
    Readings next(n);
    std::vector<double> values;
    for (std::size_t i = 0; i < n; ++i) values.push_back(10 + next());
    const Moments moments(values, 0, n);
    const double sd = std::sqrt(static_cast<double>(moments.squares) / static_cast<double>(n - 1));
    const double limit =
        static_cast<double>(moments.mean) + prediction_factor(static_cast<std::int64_t>(n), h) * sd;
    values.push_back(limit);
    const LevelSplit split = best_level_split(stretch_of(values));
    CAPTURE(n);
    CHECK(split.single());
    CHECK(split.t == doctest::Approx(t_of_normal_score(h, static_cast<double>(n - 1))).epsilon(1e-8));
    CHECK(level_score(split.t, split.count) == doctest::Approx(h).epsilon(1e-8));
    values.back() = limit + 1e-6;
    const LevelSplit beyond = best_level_split(stretch_of(values));
    CHECK(level_score_exceeds(beyond.t, beyond.count, h));
    values.back() = limit - 1e-6;
    const LevelSplit within = best_level_split(stretch_of(values));
    CHECK_FALSE(level_score_exceeds(within.t, within.count, h));
  }
}

TEST_CASE("whether the level score exceeds h is decided as by the score itself") {
  for (const std::int64_t n : {5, 6, 10, 40, 400, 100000})
    for (double h = 3; h < 5; h += 0.37)
      for (double t = -20; t < 20; t += 0.0173) {
        const bool exceeds = std::abs(normal_score_of_t(t, static_cast<double>(n - 2))) > h;
        CHECK(level_score_exceeds(t, n, h) == exceeds);
      }
}

TEST_CASE("some F beyond its limit, and the precision score above h, are the same") {
  std::mt19937_64 engine(20260107);
  std::printf("seed 20260107\n");
  std::vector<float> scratch;
  int above = 0;
  for (int run = 0; run < 600; ++run) {
    const auto values = random_readings(engine, run % 2 == 1);
    const double h = 1.5 + 0.005 * run, resolution = smallest_step(values);
    bool beyond = false;
    for (std::size_t k = 5; k + 2 <= values.size(); ++k)
      beyond = beyond || variance_ratio(values, k, resolution) >
                             precision_limit(h, static_cast<std::int64_t>(k),
                                             static_cast<std::int64_t>(values.size() - k));
    const bool exceeds = best_precision_split(stretch_of(values), scratch).score > h;
    above += exceeds;
    CHECK(exceeds == beyond);
  }
  CHECK(above > 50);
  CHECK(above < 550);
  CHECK(std::isinf(precision_limit(5, 5, 3)));
  CHECK(precision_score(precision_limit(3.5, 40, 12), 40, 12) == doctest::Approx(3.5).epsilon(1e-12));
}

TEST_CASE("splits that explain equally well: the earliest is the start") {
  // After 3 and after 5 readings the means differ by the same, with as many readings on either side.
  const LevelSplit split = best_level_split(stretch_of({1, 1, 1, 3, 1, 3, 3, 3}));
  CHECK(split.before == 3);
  CHECK(split.t > 0);
  CHECK(best_level_split(stretch_of({3, 3, 3, 1, 3, 1, 1, 1})).t == doctest::Approx(-split.t));
}

TEST_CASE("coarse readings: no sum of squares is taken for smaller than the resolution allows") {
  const std::vector<double> values = {10.6, 10.6, 10.6, 10.6, 10.6, 10.6, 10.6, 10.7};
  const double r = 0.1, n = 8;
  const LevelSplit split = best_level_split(stretch_of(values));
  CHECK(split.single());
  CHECK(split.residual == doctest::Approx((n - 2) * r * r / 12));
  CHECK(split.t == doctest::Approx(std::sqrt(7.0 / 8 * r * r / (r * r / 12))));
  // A configured resolution takes the place of the smallest step seen.
  CHECK(best_level_split(stretch_of(values, 400, 0.2)).t == doctest::Approx(split.t / 2));
  std::vector<float> scratch;
  CHECK(best_precision_split(stretch_of(values), scratch).score ==
        doctest::Approx(precision_by_definition(values, r).value));
}

TEST_CASE("readings that are all the same say nothing and make no NaN") {
  const Stretch stretch = stretch_of(std::vector<double>(20, 10.62));
  std::vector<float> scratch;
  CHECK(best_level_split(stretch).t == doctest::Approx(0));
  CHECK(std::isfinite(best_precision_split(stretch, scratch).score));
  CHECK(best_precision_split(stretch, scratch).score < 1);
  CHECK_FALSE(serial_correlation(stretch, 20));
  CHECK(residual_correlation(stretch, 10) == doctest::Approx(0));
}

TEST_CASE("a level far from zero costs no digits") {
  Readings next(7);
  std::vector<double> near, far;
  for (int i = 0; i < 300; ++i) {
    // Multiples of 2^-10, so that adding 2^20 is exact.
    near.push_back(std::round(next() * 1024) / 1024);
    far.push_back(near.back() + 1048576);
  }
  CHECK(best_level_split(stretch_of(far)).t ==
        doctest::Approx(best_level_split(stretch_of(near)).t).epsilon(1e-9));
}

TEST_CASE("a reading of absurd size makes no NaN or infinity") {
  for (const double absurd : {1e30, 1e160, -1e308}) {
    std::vector<double> values = {1, 2, 3, 2, 1, 2, 3, 2};
    values.push_back(absurd);
    for (int i = 0; i < 10; ++i) values.push_back(2 + 0.1 * i);
    const Stretch stretch = stretch_of(values);
    std::vector<float> scratch;
    CHECK(std::isfinite(best_level_split(stretch).t));
    CHECK(std::isfinite(best_precision_split(stretch, scratch).score));
  }
}

TEST_CASE("a gross reading taken out leaves nothing behind in the sums") {
  Readings next(11);
  std::vector<double> clean;
  for (int i = 0; i < 60; ++i) clean.push_back(10 + next());
  std::vector<double> soiled = clean;
  soiled.insert(soiled.begin() + 40, 1e9);
  Stretch stretch = stretch_of(soiled);
  CHECK(stretch.set_aside(stretch.prefix(40), 41) == 1);
  const Stretch expected = stretch_of(clean);
  REQUIRE(stretch.count() == 60);
  for (std::size_t j = 0; j <= 60; ++j) {
    // Value by value the same operations, hence the same bits.
    CHECK(std::abs(stretch.sum()[j] - expected.sum()[j]) <= 0);
    CHECK(std::abs(stretch.squares()[j] - expected.squares()[j]) <= 0);
    CHECK(std::abs(stretch.prefix(j).ranges - expected.prefix(j).ranges) <= 0);
  }
}

// A first-order autoregression of known r, about two means.
TEST_CASE("serial correlation is estimated about the two means and lowers what a split is worth") {
  Readings next(13);
  std::vector<double> values;
  double state = 0;
  for (int i = 0; i < 400; ++i) {
    state = 0.6 * state + 0.8 * next();
    values.push_back(state + (i < 200 ? 0 : 5));
  }
  const Stretch stretch = stretch_of(values);
  const LevelSplit split = best_level_split(stretch);
  CHECK(residual_correlation(stretch, split.position) == doctest::Approx(0.6).epsilon(0.2));
  CHECK(*serial_correlation(stretch, 400) > 0.8);
  CHECK(holds_with_serial_correlation(stretch, split, 4));
  const double score = level_score(split.t, split.count);
  CHECK_FALSE(holds_with_serial_correlation(stretch, split, 0.9 * score));
}

TEST_CASE("without serial correlation the allowance changes nothing") {
  std::vector<double> values;  // alternating, so the estimate is held at 0
  for (int i = 0; i < 40; ++i) values.push_back((i % 2 == 0 ? 1.0 : -1.0) + (i < 25 ? 0 : 2));
  const Stretch stretch = stretch_of(values);
  const LevelSplit split = best_level_split(stretch);
  const double score = level_score(split.t, split.count);
  CHECK(holds_with_serial_correlation(stretch, split, score * (1 - 1e-9)));
  CHECK_FALSE(holds_with_serial_correlation(stretch, split, score * (1 + 1e-9)));
}
