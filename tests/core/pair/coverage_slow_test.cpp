// Coverage of the default intervals (delete-one jackknife, t on n-2 degrees of freedom) by simulation: 95 %
// intervals of slope, intercept and bias hold the truth in 93 to 97 % of windows, whatever lambda and range.
#include "core/base/distributions.hpp"
#include "core/pair/bias.hpp"
#include "core/pair/jackknife.hpp"
#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
constexpr int kRuns = 4000;

struct Held {
  int slope = 0, intercept = 0, bias = 0;
};

Held held(const Plant& plant, std::size_t n, double level, std::uint64_t seed) {
  std::mt19937_64 random(seed);
  const double t = t_quantile_of_tail(0.025, static_cast<double>(n) - 2);
  const double delta = plant.sd_y * plant.sd_y / (plant.sd_x * plant.sd_x);
  const auto covers = [t](double estimate, double se, double truth) {
    return std::abs(estimate - truth) <= t * se ? 1 : 0;
  };
  Held count;
  for (int i = 0; i < kRuns; ++i) {
    const auto points = draw(plant, n, random);
    const Moments m(points);
    const DemingLine line = deming_line(m, delta);
    const auto covariance = jackknife_covariance(points, m, line);
    if (!line.exists() || !covariance) continue;
    count.slope += covers(line.slope, std::sqrt(covariance->slope), plant.slope);
    count.intercept += covers(line.intercept(), bias_at(line, *covariance, 0).se, plant.intercept);
    const Bias bias = bias_at(line, *covariance, level);
    count.bias += covers(bias.value, bias.se, plant.intercept + (plant.slope - 1) * level);
  }
  return count;
}

void check_share(int count, const char* what) {
  const double share = static_cast<double>(count) / kRuns;
  CAPTURE(what);
  CHECK(share > 0.93);
  CHECK(share < 0.97);
}
}  // namespace

TEST_CASE("95 % intervals cover 93 to 97 % at several lambdas, ranges and sizes of the window") {
  std::uint64_t seed = 400;
  for (const std::size_t n : {20U, 40U, 100U})
    for (const auto& [sd_x, sd_y] : {std::pair{0.1, 0.1}, {0.2, 0.1}, {0.1, 0.2}, {0.05, 0.2}})
      for (const auto& [low, high] : {std::pair{9.0, 15.0}, {10.0, 12.0}}) {
        const Held count = held({low, high, 0.1, 1.02, sd_x, sd_y}, n, 10.5, ++seed);
        MESSAGE("n " << n << ", sd " << sd_x << " and " << sd_y << ", " << low << " to " << high << ": slope "
                     << count.slope / 40.0 << ", intercept " << count.intercept / 40.0 << ", bias "
                     << count.bias / 40.0 << " %");
        check_share(count.slope, "slope");
        check_share(count.intercept, "intercept");
        check_share(count.bias, "bias");
      }
}
