// Exact run lengths against printed tables and independently computed values.
#include "core/chart/classical/run_length.hpp"

#include <cmath>
#include <stdexcept>
#include <string>

#include <doctest/doctest.h>

#include "core/base/distributions.hpp"

using namespace agreed;
using namespace agreed::classical;

namespace {
constexpr double kShifts[] = {0, 0.25, 0.5, 0.75, 1, 1.5, 2, 2.5, 3, 4};

RunRules classic(const std::string& which) {
  RunRules rules;
  if (which.find('2') != std::string::npos) rules.two_of_three_beyond = 2;
  if (which.find('3') != std::string::npos) rules.four_of_five_beyond = 1;
  if (which.find('4') != std::string::npos) rules.same_side = 8;
  return rules;
}
}  // namespace

TEST_CASE("three sigma: 370.40 readings") {
  CHECK(std::abs(limits_run_length(3) - 370.398347345) < 1e-6);
  CHECK(std::abs(limits_run_length(3, 1) - 43.89) < 0.0051);
  CHECK(limits_run_length(3, 1) == doctest::Approx(limits_run_length(3, -1)).epsilon(1e-14));
}

// Lucas and Saccucci, Technometrics 32 (1990) 1, table of run lengths. Printed digits, off by up to 0.1 since
// the widths are printed with three decimals; beside them values computed independently to 1e-3.
TEST_CASE("EWMA with limits of constant width") {
  struct Row {
    double weight, width, printed[10], computed[10];
  };
  const Row rows[] = {{0.4,
                       3.054,
                       {500, 224, 71.2, 28.4, 14.3, 5.9, 3.5, 2.5, 2.0, 1.4},
                       {499.9513386428, 223.7278132668, 71.2005020053, 28.41838481751, 14.26276426305,
                        5.874941762638, 3.521539198799, 2.539150303625, 2.018629564894, 1.439895801554}},
                      {0.2,
                       2.962,
                       {500, 150, 41.8, 18.2, 10.5, 5.5, 3.7, 2.9, 2.4, 1.9},
                       {499.7351221659, 150.2164029197, 41.76439576247, 18.14962344632, 10.54166579656,
                        5.50064869897, 3.743439060539, 2.880269675443, 2.38090348408, 1.864365659693}},
                      {0.1,
                       2.814,
                       {500, 106, 31.3, 15.9, 10.3, 6.1, 4.4, 3.4, 2.9, 2.2},
                       {499.5795500827, 106.3218529784, 31.29743519628, 15.84754397799, 10.33066515522,
                        6.084184342104, 4.362253413742, 3.441698220877, 2.868003512316, 2.193095389924}}};
  for (const Row& row : rows)
    for (std::size_t i = 0; i < 10; ++i) {
      CAPTURE(row.weight);
      CAPTURE(kShifts[i]);
      const double length = ewma_run_length_asymptotic(row.weight, row.width, kShifts[i]);
      CHECK(std::abs(length - row.computed[i]) < 1e-6 * row.computed[i]);
      CHECK(std::abs(length - row.printed[i]) < (row.printed[i] > 100 ? 0.51 : 0.1));
    }
}

TEST_CASE("EWMA 0.2 with width 2.86: 371.1 with constant, 365.9 with exact limits") {
  CHECK(std::abs(ewma_run_length_asymptotic(0.2, 2.86) - 371.1) < 0.05);
  CHECK(std::abs(ewma_run_length(0.2, 2.86) - 365.9) < 0.05);
}

TEST_CASE("an EWMA that forgets at once is the limits alone, with either kind of limits") {
  for (const double shift : {0.0, 1.0, 2.5}) {
    CHECK(ewma_run_length(1, 3, shift) == doctest::Approx(limits_run_length(3, shift)).epsilon(1e-9));
    CHECK(ewma_run_length_asymptotic(1, 3, shift) ==
          doctest::Approx(limits_run_length(3, shift)).epsilon(1e-9));
  }
  // Of one reading the exact limits are those of the limits alone: 1 in the sum, then the chance to go on.
  CHECK(ewma_run_length(0.2, 2.86) < ewma_run_length_asymptotic(0.2, 2.86));
}

// Lucas and Crosier, Technometrics 24 (1982) 199: printed digits; computed independently to 1e-3.
TEST_CASE("tabular cumulative sum") {
  const double four[] = {167.6837888136, 74.224027885,  26.63020308887, 13.28508837525, 8.383131870495,
                         4.74716819947,  3.34277012943, 2.619518911508, 2.194480908612, 1.708457163286};
  const double five[] = {465.4435060313, 139.493689772,  37.99614318936, 17.04832594294, 10.37596992159,
                         5.747217703429, 4.008871061031, 3.113688391473, 2.573252051447, 2.012567523282};
  const double printed_four[] = {168, 74.2, 26.6, 13.3, 8.38, 4.75, 3.34, 2.62, 2.19, 1.71};
  const double printed_five[] = {465, 139, 38.0, 17.0, 10.4, 5.75, 4.01, 3.11, 2.57, 2.01};
  for (std::size_t i = 0; i < 10; ++i) {
    CAPTURE(kShifts[i]);
    const auto half_digit = [](double printed) {
      return printed > 100 ? 0.51 : printed > 10 ? 0.051 : 0.0051;
    };
    const double at_four = cusum_run_length(0.5, 4, kShifts[i]);
    const double at_five = cusum_run_length(0.5, 5, kShifts[i]);
    CHECK(std::abs(at_four - four[i]) < 1e-7 * four[i]);
    CHECK(std::abs(at_five - five[i]) < 1e-7 * five[i]);
    CHECK(std::abs(at_four - printed_four[i]) < half_digit(printed_four[i]));
    CHECK(std::abs(at_five - printed_five[i]) < half_digit(printed_five[i]));
  }
  CHECK(std::abs(cusum_run_length_one_sided(0.5, 4) - 335.3675776271) < 1e-3);
  CHECK(std::abs(cusum_run_length_one_sided(0.5, 5) - 930.8870120627) < 1e-3);
}

// Champ and Woodall, Technometrics 29 (1987) 393, table 1 (printed); from 1.4 on computed independently with
// a chain of 555 states.
TEST_CASE("run rules") {
  const char* which[] = {"1", "12", "13", "14", "123", "124", "134", "1234"};
  struct Row {
    double shift, printed[8];
  };
  const Row rows[] = {{0.0, {370.40, 225.44, 166.05, 152.73, 132.89, 122.05, 105.78, 91.75}},
                      {0.4, {200.08, 104.46, 63.88, 59.76, 52.93, 48.71, 40.95, 36.61}},
                      {1.0, {43.89, 20.01, 12.66, 14.58, 10.95, 11.73, 10.19, 9.22}}};
  for (const Row& row : rows)
    for (std::size_t i = 0; i < 8; ++i) {
      CAPTURE(which[i]);
      CHECK(std::abs(rules_run_length(classic(which[i]), true, row.shift).value() - row.printed[i]) < 0.0051);
    }
  const double at_two[] = {6.302962987143, 3.646364984872, 3.680116427855, 4.890709582874,
                           3.140205360771, 3.502153568809, 3.649941137605, 3.12760137211};
  for (std::size_t i = 0; i < 8; ++i)
    CHECK(rules_run_length(classic(which[i]), true, 2).value() == doctest::Approx(at_two[i]).epsilon(1e-6));
}

TEST_CASE("a rule alone, in closed form") {
  RunRules nine;
  nine.same_side = 9;  // first run of nine heads or tails: 2^9 - 1 tosses
  CHECK(rules_run_length(nine, false).value() == doctest::Approx(511).epsilon(1e-9));
  RunRules near;
  near.near_centre = 15;  // first run of r successes of chance p: (1 - p^r) / ((1 - p) p^r)
  const double p = 1 - 2 * normal_tail(1), pr = std::pow(p, 15);
  CHECK(rules_run_length(near, false).value() == doctest::Approx((1 - pr) / ((1 - p) * pr)).epsilon(1e-9));
}

TEST_CASE("what a chain cannot say it does not say") {
  RunRules rules;
  CHECK_FALSE(rules_run_length(rules, false));
  CHECK(rules_run_length(rules).value() == doctest::Approx(limits_run_length(3)));
  rules.trend = 6;
  CHECK_FALSE(rules_run_length(rules));
  rules.trend = 0;
  rules.alternating = 14;
  CHECK_FALSE(rules_run_length(rules));
}

TEST_CASE("the moving range makes the limits call more often, at every shift") {
  for (const double shift : {0.0, 0.5, 1.0, 2.0, 4.0}) {
    const double both = individuals_run_length(shift);
    CHECK(both < limits_run_length(3, shift));
    CHECK(both >= 1);
    CHECK(both == doctest::Approx(individuals_run_length(-shift)).epsilon(1e-10));
  }
}

TEST_CASE(
    "limits too wide for any signal are told as the longest run length, those out of range are refused") {
  CHECK(ewma_run_length_asymptotic(0.2, 10) == doctest::Approx(kLongestRunLength));
  CHECK(cusum_run_length_one_sided(0.5, 100) == doctest::Approx(kLongestRunLength));
  CHECK(limits_run_length(30) == doctest::Approx(kLongestRunLength));
  CHECK_THROWS_AS((void)ewma_run_length(0, 3), std::domain_error);
  CHECK_THROWS_AS((void)ewma_run_length(0.2, 0), std::domain_error);
  CHECK_THROWS_AS((void)cusum_run_length(-0.1, 5), std::domain_error);
  CHECK_THROWS_AS((void)cusum_run_length(0.5, 0), std::domain_error);
}
