#include "core/plan/waits.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>
#include <vector>

#include <doctest/doctest.h>

#include "core/base/random_normal.hpp"

using namespace agreed;
using namespace agreed::plan;
using doctest::Approx;

TEST_CASE("quantiles are order statistics, and what was not told in time stays untold") {
  Waits waits(10);
  for (const int wait : {3, 1, 2, 4, 5, 6, 7, 8}) waits.add(wait);
  waits.add(std::nullopt);
  waits.add(std::nullopt);
  CHECK(waits.trials() == 10);
  CHECK(waits.horizon() == 10);
  CHECK(waits.unnoticed() == 2);
  CHECK(waits.median()->value == 5);
  CHECK(waits.quantile(0.75)->value == 8);
  CHECK(waits.quantile(0.8)->value == 8);
  CHECK_FALSE(waits.quantile(0.81));
  CHECK_FALSE(waits.quantile(0.9));
  CHECK(waits.quantile(0.01)->value == 1);
}

TEST_CASE("every quantile is the least wait by which that share was told") {
  RandomNormal draw(7);
  for (int plant = 0; plant < 50; ++plant) {
    Waits waits(30);
    std::vector<int> all;
    for (int i = 0; i < 20 + plant; ++i) {
      const int wait = 1 + static_cast<int>(draw.uniform() * 40);
      waits.add(wait <= 30 ? std::optional(wait) : std::nullopt);
      all.push_back(wait);
    }
    for (const double share : {0.1, 0.25, 0.5, 0.9, 0.99}) {
      const auto told_by = [&](int n) {
        return static_cast<double>(std::count_if(all.begin(), all.end(), [n](int w) { return w <= n; })) /
               static_cast<double>(all.size());
      };
      const auto quantile = waits.quantile(share);
      if (!quantile) {
        CHECK(told_by(30) < share);
        continue;
      }
      const int n = static_cast<int>(quantile->value);
      CHECK(told_by(n) >= share - 1e-9);
      CHECK(told_by(n - 1) < share);
      CHECK(waits.noticed_within(n).value == Approx(told_by(n)));
    }
  }
}

TEST_CASE("the standard error of a median is that seen between simulations") {
  // Geometric waits, chance 0.02 a reading: medians of 400 trials, 400 times.
  RandomNormal draw(8);
  double sum = 0, squares = 0, stated = 0;
  constexpr int repeats = 400;
  for (int repeat = 0; repeat < repeats; ++repeat) {
    Waits waits(1000);
    for (int i = 0; i < 400; ++i) {
      const double wait = std::ceil(std::log(draw.uniform()) / std::log(0.98));
      waits.add(wait <= 1000 ? std::optional(static_cast<int>(wait)) : std::nullopt);
    }
    const Simulated median = *waits.median();
    sum += median.value;
    squares += median.value * median.value;
    stated += median.standard_error / repeats;
  }
  const double mean = sum / repeats, seen = std::sqrt(squares / repeats - mean * mean);
  // ln 2 / -ln 0.98 = 34.3, and a median of whole readings lies half a reading above.
  CHECK(mean == Approx(34.8).epsilon(0.02));
  CHECK(stated == Approx(seen).epsilon(0.1));
}

TEST_CASE("a share of none or all has an error all the same") {
  Waits none(5), all(5);
  for (int i = 0; i < 100; ++i) {
    none.add(std::nullopt);
    all.add(1);
  }
  CHECK(none.noticed_within(5).value == 0);
  CHECK(all.noticed_within(1).value == 1);
  // Agresti and Coull: (2/104)(102/104)/104.
  CHECK(none.noticed_within(5).standard_error == Approx(std::sqrt(2.0 / 104 * 102 / 104 / 104)));
  CHECK(all.noticed_within(5).standard_error == Approx(none.noticed_within(5).standard_error));
  CHECK(all.noticed_within(0).value == 0);
  CHECK(all.noticed_within(1000).value == 1);
  CHECK_FALSE(none.median());
  // All the same wait: nothing between the ranks.
  CHECK(*all.median() == Simulated{1, 0});
}

TEST_CASE("an upper rank beyond the horizon makes the error no smaller") {
  Waits waits(100);
  for (int i = 1; i <= 51; ++i) waits.add(i);
  for (int i = 0; i < 49; ++i) waits.add(std::nullopt);
  // Ranks 40 and 60 of 100 about the 50th; the 60th was not told.
  CHECK(waits.median()->value == 50);
  CHECK(waits.median()->standard_error == Approx((101 - 40) / 4.0));
}

TEST_CASE("what is no wait, no horizon or no share is refused") {
  CHECK_THROWS_AS(Waits(0), std::invalid_argument);
  Waits waits(5);
  CHECK_FALSE(waits.median());
  CHECK_THROWS_AS((void)waits.noticed_within(1), std::invalid_argument);
  CHECK_THROWS_AS(waits.add(0), std::invalid_argument);
  CHECK_THROWS_AS(waits.add(6), std::invalid_argument);
  CHECK_THROWS_AS((void)waits.quantile(0), std::invalid_argument);
  CHECK_THROWS_AS((void)waits.quantile(1), std::invalid_argument);
  CHECK(waits.trials() == 0);
}
