#include "core/chart/classical/expected_run_length.hpp"

#include <algorithm>
#include <cmath>

#include "core/base/random_normal.hpp"
#include "core/chart/classical/constants.hpp"
#include "core/chart/classical/level_tests.hpp"
#include "core/chart/classical/run_length.hpp"
#include "core/chart/moving_range.hpp"

namespace agreed::classical {
namespace {
constexpr std::uint64_t kSeed = 20'250'101;
constexpr int kRuns = 20'000;
constexpr int kCharts = 3'000, kReadingsEach = 500;

/// A chart of single readings as the simulations need it; in units of the true sigma.
struct Simulated {
  double center, sigma;
  const ClassicalSettings& chosen;
  bool with_moving_range;
  LevelTests tests{};
  double previous = 0;
  bool has_previous = false;

  bool signals(double value) {
    const double z = (value - center) / sigma, range = std::abs(value - previous) / sigma;
    const bool scatter = with_moving_range && has_previous && range > kMovingRangeLimit * kD2;
    previous = value;
    has_previous = true;
    return tests.take(z, chosen).signals.any() || scatter;
  }
};

/// Centre line and sigma as one chart has them, when the truth is 0 and 1; and the last baseline reading.
struct Limits {
  double center = 0, sigma = 1;
  std::optional<double> last;
};

Limits drawn_limits(const ClassicalSettings& chosen, int baseline, RandomNormal& next) {
  Limits limits;
  if (chosen.center && chosen.sigma) {
    if (const auto nu = chosen.sigma_degrees_of_freedom)
      limits.sigma = std::sqrt(next.chi_squared(*nu) / *nu);
    return limits;
  }
  double sum = 0, ranges = 0;
  for (int i = 0; i < baseline; ++i) {
    const double value = next();
    sum += value;
    if (limits.last) ranges += std::abs(value - *limits.last);
    limits.last = value;
  }
  if (!chosen.center) limits.center = sum / baseline;
  limits.sigma = ranges / (baseline - 1) / kD2;
  return limits;
}

bool is_exact(const ClassicalSettings& chosen) {
  return chosen.center && chosen.sigma && !chosen.sigma_degrees_of_freedom;
}

bool any_rule(const RunRules& r) {
  return r.same_side > 0 || r.trend > 0 || r.two_of_three_beyond > 0 || r.four_of_five_beyond > 0 ||
         r.alternating > 0 || r.near_centre > 0 || r.away_from_centre > 0;
}

void add_parts(const ClassicalSettings& chosen, ExpectedRunLength& expected) {
  expected.limits = limits_run_length(kLimitWidth);
  expected.limits_and_moving_range = individuals_run_length();
  if (any_rule(chosen.run_rules)) {
    ClassicalSettings only_rules;
    only_rules.run_rules = chosen.run_rules;
    const auto exact = rules_run_length(chosen.run_rules);
    expected.limits_and_run_rules =
        exact ? *exact : simulated_run_length(only_rules, false, kRuns / 2, kSeed).readings;
  }
  if (chosen.ewma_weight && chosen.ewma_width)
    expected.ewma = ewma_run_length(*chosen.ewma_weight, *chosen.ewma_width);
  if (chosen.cusum_allowance && chosen.cusum_limit)
    expected.cusum = cusum_run_length(*chosen.cusum_allowance, *chosen.cusum_limit);
}
}  // namespace

bool all_run_rules(const RunRules& r) {
  return r.same_side > 0 && r.trend > 0 && r.two_of_three_beyond > 0 && r.four_of_five_beyond > 0 &&
         r.alternating > 0 && r.near_centre > 0 && r.away_from_centre > 0;
}

SimulatedRunLength simulated_run_length(const ClassicalSettings& chosen, bool with_moving_range, int runs,
                                        std::uint64_t seed) {
  RandomNormal next(seed);
  double sum = 0, squares = 0;
  for (int i = 0; i < runs; ++i) {
    Simulated chart{0, 1, chosen, with_moving_range};
    double length = 1;
    while (!chart.signals(next())) ++length;
    sum += length;
    squares += length * length;
  }
  const double mean = sum / runs;
  return {mean, std::sqrt((squares / runs - mean * mean) / (runs - 1))};
}

SimulatedRunLength simulated_with_own_limits(const ClassicalSettings& chosen, int baseline, int charts,
                                             std::uint64_t seed) {
  RandomNormal next(seed);
  double sum = 0, squares = 0;
  for (int i = 0; i < charts; ++i) {
    const Limits limits = drawn_limits(chosen, baseline, next);
    const Simulated fresh{limits.center,           limits.sigma,           chosen, true, {},
                          limits.last.value_or(0), limits.last.has_value()};
    Simulated chart = fresh;
    double signals = 0;
    for (int reading = 0; reading < kReadingsEach; ++reading) {
      const double value = next();
      if (!chart.signals(value)) continue;
      ++signals;
      chart.tests = {};
      chart.has_previous = false;  // what the same reading does to the next moving range is the same alert
    }
    sum += signals;
    squares += signals * signals;
  }
  const double mean = sum / charts;
  if (!(mean > 0)) return {kLongestRunLength, kLongestRunLength};
  const double relative = std::sqrt((squares / charts - mean * mean) / (charts - 1)) / mean;
  return {kReadingsEach / mean, kReadingsEach / mean * relative};
}

ExpectedRunLength expected_run_length(const ClassicalSettings& chosen, int baseline) {
  ExpectedRunLength expected;
  add_parts(chosen, expected);
  const bool only_limits = !any_rule(chosen.run_rules) && expected.ewma <= 0 && expected.cusum <= 0;
  if (only_limits) {
    expected.known_parameters = expected.limits_and_moving_range;
  } else {
    const SimulatedRunLength known = simulated_run_length(chosen, true, kRuns, kSeed);
    expected.known_parameters = known.readings;
    expected.known_standard_error = known.standard_error;
  }
  if (is_exact(chosen)) {
    expected.readings = expected.known_parameters;
    expected.standard_error = expected.known_standard_error;
    return expected;
  }
  const SimulatedRunLength own = simulated_with_own_limits(chosen, baseline, kCharts, kSeed);
  expected.readings = own.readings;
  expected.standard_error = own.standard_error;
  return expected;
}

}  // namespace agreed::classical
