#include "core/pair/level_errors.hpp"

#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

TEST_CASE("rank correlation: order, ties, no spread") {
  const std::vector<double> rising{1, 2, 30, 400}, falling{9, 7, 3, 1}, flat{5, 5, 5, 5};
  CHECK_CLOSE(rank_correlation(rising, rising), 1, 1e-15);
  CHECK_CLOSE(rank_correlation(rising, falling), -1, 1e-15);
  CHECK(rank_correlation(rising, flat) == 0);
  // Ranks 0, 1.5, 1.5, 3 against 0, 1, 2, 3: 4.5 / sqrt(4.5 * 5) by hand.
  const std::vector<double> tied{1, 2, 2, 3};
  CHECK_CLOSE(rank_correlation(tied, rising), 4.5 / std::sqrt(4.5 * 5), 1e-14);
}

TEST_CASE("errors proportional to the level are noticed, constant ones are not") {
  std::mt19937_64 random(61);
  std::normal_distribution<double> error;
  ErrorRatio ratio;
  ratio.known = true;
  Window constant(200, std::nullopt), growing(200, std::nullopt);
  for (int i = 0; i < 200; ++i) {
    const double truth = 2 + 0.1 * i;
    const double ex = 0.02 * error(random), ey = 0.02 * error(random);
    constant.insert({truth + ex, truth + ey}, {});
    growing.insert({truth * (1 + ex), truth * (1 + ey)}, {});
  }
  CHECK_FALSE(error_grows_with_level(constant.points(), fit_window(constant, ratio)));
  CHECK(error_grows_with_level(growing.points(), fit_window(growing, ratio)));
  CHECK_FALSE(error_grows_with_level(growing.points().first(39), fit_window(growing, ratio)));
}
