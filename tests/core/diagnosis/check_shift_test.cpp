#include "core/diagnosis/check_shift.hpp"

#include <cmath>
#include <random>

#include <doctest/doctest.h>

#include "core/diagnosis/pair_shift.hpp"

using namespace agreed;

namespace {
Instant hour(int h) {
  return Instant{std::chrono::hours(h)};
}

std::vector<CheckPoint> readings_of(std::initializer_list<double> values) {
  std::vector<CheckPoint> readings;
  for (const double value : values)
    readings.push_back({hour(static_cast<int>(readings.size())), value, false, readings.empty()});
  return readings;
}

const Moment at_five{Instant::min(), hour(5)};
}  // namespace

TEST_CASE("mean after less mean before, with the pooled scatter of both sides") {
  const CheckShift found =
      check_shift(readings_of({10.0, 10.1, 9.9, 10.1, 9.9, 10.3, 10.5, 10.4}), at_five, 0);
  REQUIRE(found.shift);
  CHECK(found.before == 5);
  CHECK(found.after == 3);
  CHECK(found.shift->value == doctest::Approx(0.4));
  // Sums of squares 0.04 and 0.02 on 6 degrees of freedom, widened by 6/4.
  const double sd = std::sqrt(0.06 / 6 * 6 / 4);
  CHECK(*found.sd == doctest::Approx(sd));
  CHECK(found.shift->se == doctest::Approx(sd * std::sqrt(1.0 / 5 + 1.0 / 3)));
}

TEST_CASE("equal readings scatter as far as their resolution hides, or not at all") {
  const auto equal = readings_of({10, 10, 10, 10, 10, 10, 10, 10});
  CHECK(*check_shift(equal, at_five, 0.1).sd == doctest::Approx(0.1 / std::sqrt(12) * std::sqrt(1.5)));
  const CheckShift exact = check_shift(equal, at_five, 0);
  REQUIRE(exact.shift);
  CHECK(exact.shift->value == 0);
  const CheckShift both = pooled(std::vector<CheckShift>{exact, exact});
  CHECK(both.shift->value == 0);
  CHECK(std::isfinite(both.shift->se));
}

TEST_CASE("what was set aside counts after the moment and not before it") {
  auto readings = readings_of({10, 10.1, 12, 9.9, 10, 10.4, 13, 10.4});
  readings[2].set_aside = readings[6].set_aside = true;
  const CheckShift found = check_shift(readings, at_five, 0);
  CHECK(found.before == 4);
  CHECK(found.after == 3);
  CHECK(found.shift->value == doctest::Approx((10.4 + 13 + 10.4) / 3 - 10));
  CHECK(found.shift->se > 0.5);  // the wild one widens what it moves
}

TEST_CASE("only the lot and the time of the moment count") {
  auto readings = readings_of({20, 20, 10, 10.1, 9.9, 10.4, 10.5, 10.6, 30, 30});
  readings[2].starts_stretch = readings[8].starts_stretch = true;
  const CheckShift found = check_shift(readings, at_five, 0);
  CHECK(found.before == 3);
  CHECK(found.after == 3);
  CHECK(found.shift->value == doctest::Approx(0.5));
  CHECK(check_shift(readings, {hour(3), hour(5)}, 0).before == 2);
  // A lot that begins with the moment has no before.
  readings[5].starts_stretch = true;
  CHECK_FALSE(check_shift(readings, at_five, 0).shift);
  CHECK(check_shift(readings, at_five, 0).after == 0);
}

TEST_CASE("too few readings give no shift, and none at all no number") {
  CHECK_FALSE(check_shift({}, at_five, 0).shift);
  CHECK_FALSE(check_shift({}, at_five, 0).sd);
  CHECK_FALSE(check_shift(readings_of({10, 10.1, 9.9, 10.2, 10}), at_five, 0).shift);  // none after
  CHECK(check_shift(readings_of({10, 10.1, 9.9, 10.2, 10}), at_five, 0).sd);
  CHECK_FALSE(check_shift(readings_of({10, 10.1}), {Instant::min(), hour(1)}, 0).sd);
  CHECK_FALSE(pooled({}).shift);
}

TEST_CASE("standards of one analyzer pool by inverse variance") {
  CheckShift low, high;
  low.shift = Shift{0.1, 0.01};
  high.shift = Shift{0.2, 0.02};
  low.sd = high.sd = 0.05;
  low.before = high.before = 20;
  low.after = high.after = 5;
  const CheckShift both = pooled(std::vector<CheckShift>{low, high});
  CHECK(both.shift->value == doctest::Approx((0.1 * 4 + 0.2) / 5));
  CHECK(both.shift->se == doctest::Approx(0.02 / std::sqrt(5.0)));
  CHECK(both.before == 40);
  CHECK(both.after == 10);
  // One without readings after the moment adds nothing.
  high.shift.reset();
  CHECK(pooled(std::vector<CheckShift>{low, high}).shift->value == 0.1);
}

TEST_CASE("further readings narrow a shift towards what they show") {
  CheckShift checks;
  checks.shift = Shift{0.1, 0.05 * std::sqrt(1.0 / 20 + 1.0 / 5)};
  checks.sd = 0.05;
  checks.before = 20;
  checks.after = 5;
  const auto then = after_more_readings(checks, 15, 0.02);
  REQUIRE(then);
  CHECK(then->value == doctest::Approx((5 * 0.1 + 15 * 0.02) / 20));
  CHECK(then->se == doctest::Approx(0.05 * std::sqrt(1.0 / 20 + 1.0 / 20)));
  CHECK_FALSE(after_more_readings({}, 5, 0));
}

TEST_CASE("the shift of the pairs: the step, whatever the levels on either side") {
  std::mt19937_64 random(36);
  std::normal_distribution<double> error(0, 0.02);
  std::uniform_real_distribution<double> low(9, 12), high(11, 15);
  double mean = 0, squares = 0, se = 0;
  constexpr int rounds = 400;
  for (int round = 0; round < rounds; ++round) {
    std::vector<Point> before, after;
    for (int i = 0; i < 40; ++i) {
      const double truth = low(random);
      before.push_back({truth + error(random), 0.3 + 0.98 * truth + error(random)});
    }
    for (int i = 0; i < 15; ++i) {
      const double truth = high(random);
      after.push_back({truth + error(random), 0.4 + 0.98 * truth + error(random)});
    }
    const auto found = pair_shift(Moments(before), Moments(after), 1, 0);
    REQUIRE(found);
    mean += found->shift.value / rounds;
    squares += (found->shift.value - 0.1) * (found->shift.value - 0.1) / rounds;
    se += found->shift.se / rounds;
    CHECK(std::abs(found->slope - 0.98) < 0.03);
  }
  CHECK(std::abs(mean - 0.1) < 4 * se / std::sqrt(rounds * 1.0));
  CHECK(std::sqrt(squares) == doctest::Approx(se).epsilon(0.12));
}

TEST_CASE("from an established line the pairs after the moment tell their shift alone") {
  std::mt19937_64 random(37);
  std::normal_distribution<double> error(0, 0.02);
  std::uniform_real_distribution<double> level(9, 15);
  const EstablishedLine line{0.3, 0.98};
  double mean = 0, squares = 0;
  constexpr int rounds = 2000, pairs = 12;
  for (int round = 0; round < rounds; ++round) {
    std::vector<Point> after;
    for (int i = 0; i < pairs; ++i) {
      const double truth = level(random);
      after.push_back({truth + error(random), 0.4 + 0.98 * truth + error(random)});
    }
    const auto found = shift_from_line(line, Moments(after), 0);
    REQUIRE(found);
    CHECK(found->slope == line.slope);
    mean += found->shift.value / rounds;
    squares += found->shift.se * found->shift.se / rounds;
  }
  const double variance = 0.02 * 0.02 * (1 + 0.98 * 0.98) / pairs;
  CHECK(std::abs(mean - 0.1) < 4 * std::sqrt(variance / rounds));
  // Widened by 11/9 for its 11 degrees of freedom.
  CHECK(squares == doctest::Approx(variance * 11 / 9).epsilon(0.05));
  CHECK_FALSE(shift_from_line(line, Moments(std::vector<Point>{{1, 1}, {2, 2}, {3, 3}}), 0));
}

TEST_CASE("pairs without a line shift by their differences; too few do not tell") {
  const std::vector<Point> before = {{10, 10}, {10, 10.1}, {10, 9.9}, {10, 10}}, after = {{10, 11}, {10, 11}};
  const auto found = pair_shift(Moments(before), Moments(after), 1, 0);
  REQUIRE(found);
  CHECK(found->slope == 1);
  CHECK(found->shift.value == doctest::Approx(1));
  CHECK_FALSE(pair_shift(Moments(before), Moments(), 1, 0));
  CHECK_FALSE(pair_shift(Moments(after), Moments(after), 1, 0));
}
