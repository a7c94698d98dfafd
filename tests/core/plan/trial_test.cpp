#include "core/plan/trial.hpp"

#include <cmath>
#include <stdexcept>
#include <vector>

#include <doctest/doctest.h>

using namespace agreed;
using namespace agreed::plan;

TEST_CASE("each trial draws the same numbers, however many the one before it took") {
  std::vector<double> little, much;
  const auto noting = [](std::vector<double>& first, int more) {
    return [&first, more](RandomNormal& draw, int) {
      first.push_back(draw());
      for (int i = 0; i < more; ++i) draw();
      return std::optional(1);
    };
  };
  TrialRun a(noting(little, 0), {50, 10, 3}), b(noting(much, 17), {50, 10, 3});
  while (a.step()) b.step();
  REQUIRE(little.size() == 50);
  CHECK(little == much);
  CHECK(little[0] != little[1]);
}

TEST_CASE("trials are made one by one, up to their number") {
  TrialRun run(
      [](RandomNormal& draw, int horizon) {
        const double wait = 1 + draw.uniform() * 2 * horizon;
        return wait <= horizon ? std::optional(static_cast<int>(wait)) : std::nullopt;
      },
      {4, 20, 1});
  CHECK(run.share_done() == 0);
  CHECK(run.step());
  CHECK(run.share_done() == 0.25);
  CHECK(run.waits().trials() == 1);
  CHECK(run.step());
  CHECK(run.step());
  CHECK(run.step());
  CHECK(run.share_done() == 1);
  CHECK_FALSE(run.step());
  CHECK(run.waits().trials() == 4);
  CHECK(run.waits().horizon() == 20);
  CHECK_THROWS_AS(TrialRun({}, {0, 20, 1}), std::invalid_argument);
  CHECK_THROWS_AS(TrialRun({}, {1, 0, 1}), std::invalid_argument);
}

TEST_CASE("streams of one seed are normal, and neighbours have nothing in common") {
  constexpr int streams = 2000, each = 20;
  double sum = 0, squares = 0, fourth = 0, products = 0;
  std::vector<double> before(each);
  for (int stream = 0; stream < streams; ++stream) {
    RandomNormal draw(20'261'202, static_cast<std::uint64_t>(stream));
    for (double& last : before) {
      const double z = draw();
      sum += z;
      squares += z * z;
      fourth += z * z * z * z;
      products += z * last;
      last = z;
    }
  }
  constexpr double n = streams * each;
  const double error = 3.5 / std::sqrt(n);
  CHECK(std::abs(sum / n) < error);
  CHECK(std::abs(squares / n - 1) < error * std::sqrt(2.0));
  CHECK(std::abs(fourth / n - 3) < error * std::sqrt(96.0));
  CHECK(std::abs(products / n) < error);
}
