// The closed form against the integral it stands for.
#include "core/diagnosis/attribution.hpp"

#include <cmath>
#include <random>
#include <vector>

#include <doctest/doctest.h>

using namespace agreed;

namespace {
double density(double value, double mean, double sd) {
  const double z = (value - mean) / sd;
  return std::exp(-z * z / 2) / sd;
}

/// Likelihood of the estimates, the shifts of x, of y and of the samples given.
double likelihood(const ShiftEstimates& e, double x, double y, double samples) {
  double product = density(e.pairs.value, y - e.slope * x + samples, e.pairs.se);
  if (e.x) product *= density(e.x->value, x, e.x->se);
  if (e.y) product *= density(e.y->value, y, e.y->se);
  return product;
}

/// Integral over the prior N(0, tau^2) of one shift, by the trapezium rule, which is exact to rounding for
/// smooth functions that vanish at both ends.
template <class Function>
double over_prior(double tau, Function of_shift) {
  constexpr int steps = 1200;
  const double width = 9 * tau, step = 2 * width / steps;
  double sum = 0;
  for (int i = 0; i <= steps; ++i) {
    const double s = -width + i * step;
    sum += density(s, 0, tau) * of_shift(s) * step;
  }
  return sum / std::sqrt(2 * M_PI);
}

std::array<double, 4> by_integration(const ShiftEstimates& e) {
  const double tau = std::max(std::abs(e.pairs.value), 2 * e.pairs.se);
  std::array<double, 4> l = {
      over_prior(tau, [&](double s) { return likelihood(e, s, 0, 0); }),
      over_prior(tau, [&](double s) { return likelihood(e, 0, s, 0); }),
      over_prior(tau,
                 [&](double s) { return over_prior(tau, [&](double t) { return likelihood(e, s, t, 0); }); }),
      over_prior(tau, [&](double s) { return likelihood(e, 0, 0, s); })};
  const double sum = l[0] + l[1] + l[2] + l[3];
  for (double& p : l) p /= sum;
  return l;
}
}  // namespace

TEST_CASE("the closed form is the integral over the free shifts") {
  std::mt19937_64 random(36);
  std::normal_distribution<double> shift(0, 0.1);
  std::uniform_real_distribution<double> se(0.02, 0.06), slope(0.8, 1.25);
  for (int round = 0; round < 20; ++round) {
    ShiftEstimates e;
    e.pairs = {shift(random), se(random)};
    if (round % 5 != 1) e.x = Shift{shift(random), se(random)};
    if (round % 5 != 2) e.y = Shift{shift(random), se(random)};
    e.slope = slope(random);
    const auto expected = by_integration(e);
    const Attribution found = attribute(e);
    for (std::size_t i = 0; i < 4; ++i)
      CHECK_MESSAGE(std::abs(found.probability[i] - expected[i]) < 1e-9, "explanation " << i);
  }
}

TEST_CASE("the analyzer whose check standard moved with the pairs is named") {
  const Shift still{0.002, 0.01}, pairs{0.2, 0.012};
  CHECK(attribute({pairs, still, Shift{0.19, 0.01}}).most_probable() == Moved::y);
  CHECK(attribute({pairs, still, Shift{0.19, 0.01}}).largest() > 0.9);
  CHECK(attribute({pairs, Shift{-0.19, 0.01}, still}).most_probable() == Moved::x);
  CHECK(attribute({pairs, Shift{-0.1, 0.01}, Shift{0.1, 0.01}}).most_probable() == Moved::both);
  CHECK(attribute({pairs, Shift{-0.1, 0.01}, Shift{0.1, 0.01}}).largest() > 0.9);
  CHECK(attribute({pairs, still, still}).most_probable() == Moved::neither);
  CHECK(attribute({pairs, still, still}).largest() > 0.9);
}

TEST_CASE("exchanging the analyzers exchanges the explanations; the unit does not matter") {
  const ShiftEstimates e{{0.13, 0.02}, Shift{0.03, 0.015}, Shift{0.12, 0.025}, 1};
  const Attribution there = attribute(e);
  const Attribution back = attribute({{-0.13, 0.02}, e.y, e.x, 1});
  CHECK(there.probability[0] == doctest::Approx(back.probability[1]).epsilon(1e-12));
  CHECK(there.probability[1] == doctest::Approx(back.probability[0]).epsilon(1e-12));
  CHECK(there.probability[2] == doctest::Approx(back.probability[2]).epsilon(1e-12));
  CHECK(there.probability[3] == doctest::Approx(back.probability[3]).epsilon(1e-12));
  const Attribution grams = attribute({{130, 20}, Shift{30, 15}, Shift{120, 25}, 1});
  for (std::size_t i = 0; i < 4; ++i)
    CHECK(grams.probability[i] == doctest::Approx(there.probability[i]).epsilon(1e-12));
}

TEST_CASE("without check readings nothing is decided, and of no shift at all nothing is said") {
  CHECK(attribute({{0.5, 0.01}, {}, {}}).largest() < 0.5);
  CHECK(attribute({{0, 0}, Shift{1, 1}, Shift{1, 1}}).probability == std::array{0.25, 0.25, 0.25, 0.25});
  // One analyzer alone: it moved, or it did not; whether the other or the samples did stays open.
  const Attribution one = attribute({{0.5, 0.01}, Shift{0.0, 0.01}, {}});
  CHECK(one.probability[0] < 1e-6);
  CHECK(one.largest() < 0.6);
}

TEST_CASE("estimates without any error still give probabilities") {
  for (const double shift : {0.0, 0.2, -0.7}) {
    const Attribution found = attribute({{0.2, 0}, Shift{0, 0}, Shift{shift, 0}});
    double sum = 0;
    for (const double p : found.probability) {
      CHECK(std::isfinite(p));
      sum += p;
    }
    CHECK(sum == doctest::Approx(1));
  }
  CHECK(attribute({{0.2, 0}, Shift{0, 0}, Shift{0.2, 0}}).most_probable() == Moved::y);
}

TEST_CASE("what an explanation expects of the check standards") {
  const ShiftEstimates e{{0.2, 0.01}, {}, Shift{0.18, 0.02}, 1};
  const ExpectedChecks y = expected_checks(e, Moved::y);
  CHECK(y.x == 0);
  // Weighted mean of both estimates of the one shift, drawn a little towards none.
  const double precision = 1 / 0.0001 + 1 / 0.0004 + 1 / 0.04;
  CHECK(y.y == doctest::Approx((0.2 / 0.0001 + 0.18 / 0.0004) / precision).epsilon(1e-12));
  CHECK(expected_checks(e, Moved::neither).y == 0);
  CHECK(expected_checks(e, Moved::x).x == doctest::Approx(-0.2 * 0.04 / (0.04 + 0.0001)).epsilon(1e-12));
}
