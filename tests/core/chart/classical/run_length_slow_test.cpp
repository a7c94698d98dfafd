// Simulated run lengths of whole combinations.
#include <cmath>

#include <doctest/doctest.h>

#include "core/chart/classical/expected_run_length.hpp"
#include "core/chart/classical/run_length.hpp"

using namespace agreed;
using namespace agreed::classical;

namespace {
constexpr std::uint64_t kSeed = 11;

void check_within_three_errors(const SimulatedRunLength& simulated, double exact) {
  CAPTURE(simulated.readings);
  CAPTURE(simulated.standard_error);
  CAPTURE(exact);
  CHECK(std::abs(simulated.readings - exact) < 3 * simulated.standard_error);
  CHECK(simulated.standard_error < 0.01 * exact);
}

ClassicalSettings with_rules(bool all) {
  ClassicalSettings chosen;
  chosen.run_rules.same_side = all ? 9 : 8;
  chosen.run_rules.two_of_three_beyond = 2;
  chosen.run_rules.four_of_five_beyond = 1;
  if (all) {
    chosen.run_rules.trend = 6;
    chosen.run_rules.alternating = 14;
    chosen.run_rules.near_centre = 15;
    chosen.run_rules.away_from_centre = 8;
  }
  return chosen;
}
}  // namespace

TEST_CASE("the simulation finds the exact run lengths") {
  ClassicalSettings chosen;
  check_within_three_errors(simulated_run_length(chosen, false, 40'000, kSeed), limits_run_length(3));
  check_within_three_errors(simulated_run_length(chosen, true, 100'000, kSeed), individuals_run_length());
  check_within_three_errors(simulated_run_length(with_rules(false), false, 100'000, kSeed), 91.75);
}

// The limits call as well, so EWMA and sum are made so narrow that those hardly count.
TEST_CASE("EWMA and cumulative sum, simulated reading by reading") {
  ClassicalSettings ewma, cusum;
  ewma.ewma_weight = 0.2;
  ewma.ewma_width = 1;
  cusum.cusum_allowance = 0.25;
  cusum.cusum_limit = 1;
  const auto by_ewma = simulated_run_length(ewma, false, 100'000, kSeed);
  const auto by_cusum = simulated_run_length(cusum, false, 100'000, kSeed);
  check_within_three_errors(by_ewma, ewma_run_length(0.2, 1));
  CHECK(std::abs(by_cusum.readings - cusum_run_length(0.25, 1)) < 0.02 * by_cusum.readings);
}

// An independent program (plain loops over the definitions, 1,500 runs) found 71.3 +- 1.8.
TEST_CASE("all run rules together") {
  const auto level = simulated_run_length(with_rules(true), false, 200'000, kSeed);
  MESSAGE("limits and all seven rules: " << level.readings << " +- " << level.standard_error);
  CHECK(std::abs(level.readings - 73.5) < 0.5);
}

TEST_CASE("a short baseline costs nearly half of the run length, a long one little") {
  const ClassicalSettings chosen;
  const double known = individuals_run_length();
  const auto at_30 = simulated_with_own_limits(chosen, 30, 20'000, kSeed);
  const auto at_400 = simulated_with_own_limits(chosen, 400, 5'000, kSeed);
  const auto at_4000 = simulated_with_own_limits(chosen, 4000, 5'000, kSeed);
  MESSAGE("baseline 30: " << at_30.readings << ", 400: " << at_400.readings << ", known: " << known);
  CHECK(at_30.readings < 0.6 * known);
  CHECK(at_400.readings < known);
  CHECK(at_400.readings > at_30.readings);
  CHECK(std::abs(at_4000.readings - known) < 3 * at_4000.standard_error + 0.02 * known);
}

TEST_CASE("a given sigma on few degrees of freedom costs too, on many hardly") {
  ClassicalSettings chosen;
  chosen.center = 10;
  chosen.sigma = 1;
  const double known = expected_run_length(chosen, 30).readings;
  CHECK(known == doctest::Approx(individuals_run_length()).epsilon(1e-12));
  chosen.sigma_degrees_of_freedom = 10;
  const double few = expected_run_length(chosen, 30).readings;
  chosen.sigma_degrees_of_freedom = 10'000;
  const ExpectedRunLength many = expected_run_length(chosen, 30);
  CHECK(few < 0.7 * known);
  CHECK(std::abs(many.readings - known) < 3 * many.standard_error + 0.02 * known);
}

TEST_CASE("the same seed gives the same figure to the bit") {
  ClassicalSettings chosen = with_rules(false);
  CHECK(expected_run_length(chosen, 30) == expected_run_length(chosen, 30));
}
