#include "core/pair/deming.hpp"

#include <algorithm>

#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
DemingLine line_through(const std::vector<Point>& points, double delta) {
  const DemingLine line = deming_line(Moments(points), delta);
  REQUIRE(line.exists());
  return line;
}

std::string reason(const std::vector<Point>& points, double delta = 1) {
  return std::string(deming_line(Moments(points), delta).reason);
}

// A cloud with a slope that is not 1, for the laws.
const Plant kPlant{9, 15, 0.5, 0.9, 0.3, 0.2};
}  // namespace

TEST_CASE("Pearson's ten points: slope and intercept at seven error ratios") {
  const auto points = read_points("pearson_1901.csv");
  for (const auto& row : read_rows("pearson_1901_deming.csv")) {
    CAPTURE(row[0]);
    const DemingLine line = line_through(points, row[0]);
    CHECK_CLOSE(line.slope, row[1], 1e-10);
    CHECK_CLOSE(line.intercept(), row[2], 1e-10);
  }
  // Pearson's best-fitting line, -0.5456 and 5.784 as printed (from memory).
  CHECK(std::abs(line_through(points, 1).slope - -0.5456) < 5e-5);
  CHECK(std::abs(line_through(points, 1).intercept() - 5.784) < 5e-4);
}

TEST_CASE("NIST's ozone monitors: Deming line, and least squares as its limit for an exact x") {
  const auto points = read_points("norris_ozone.csv");
  const DemingLine line = line_through(points, 1);
  CHECK_CLOSE(line.slope, 1.002119958349, 1e-10);
  CHECK(std::abs(line.intercept() - -0.2636394297008) < 1e-8);
  // Certified least-squares values of NIST StRD "Norris". The error of the limit is of order 1/delta.
  const Moments m(points);
  const DemingLine exact_x = line_through(points, 1e13);
  const double s2 = residual_variance(points, m, exact_x);
  const LineCovariance covariance = analytic_covariance(m, exact_x, s2, 0);
  CHECK_CLOSE(exact_x.slope, 1.00211681802045, 1e-12);
  CHECK_CLOSE(exact_x.intercept(), -0.262323073774029, 1e-9);
  CHECK_CLOSE(std::sqrt(s2), 0.884796396144373, 1e-9);
  CHECK_CLOSE(std::sqrt(covariance.slope), 0.000429796848199937, 1e-9);
  CHECK_CLOSE(std::sqrt(covariance.difference_at(0 - exact_x.mean_x)), 0.232818234301152, 1e-9);
}

TEST_CASE("law: pairs on an exact line give that line, without residual") {
  std::vector<Point> points;
  for (int i = 0; i < 9; ++i) points.push_back({1.0 * i, 3 + 1.25 * i});
  for (const double delta : {1e-6, 0.1, 1.0, 10.0, 1e6}) {
    const DemingLine line = line_through(points, delta);
    CHECK_CLOSE(line.slope, 1.25, 1e-12);
    CHECK_CLOSE(line.intercept(), 3, 1e-11);
    CHECK(residual_variance(points, Moments(points), line) < 1e-24);
  }
}

TEST_CASE("laws: permutation, shift and scaling") {
  std::mt19937_64 random(11);
  const auto points = draw(kPlant, 60, random);
  const double delta = 0.7;
  const DemingLine line = line_through(points, delta);

  auto permuted = points;
  std::shuffle(permuted.begin(), permuted.end(), random);
  CHECK_CLOSE(line_through(permuted, delta).slope, line.slope, 1e-12);

  // Rounding of values at 1e6 is 1e-10 of a spread of about 2.
  auto shifted = points;
  for (Point& p : shifted) p = {p.x + 1e6, p.y + 1e6};
  CHECK_CLOSE(line_through(shifted, delta).slope, line.slope, 1e-9);
  CHECK(std::abs(line_through(shifted, delta).mean_difference - line.mean_difference) < 1e-9);

  // y times k: the y error grows by k, so delta by k^2 and lambda falls by k^2.
  auto scaled = points;
  for (Point& p : scaled) p.y *= 2.5;
  CHECK_CLOSE(line_through(scaled, delta * 6.25).slope, 2.5 * line.slope, 1e-12);
}

TEST_CASE("law: exchanging x and y with 1/lambda gives the same line the other way round") {
  std::mt19937_64 random(12);
  auto points = draw(kPlant, 60, random);
  for (const double delta : {0.01, 1.0, 50.0}) {
    const DemingLine line = line_through(points, delta);
    auto swapped = points;
    for (Point& p : swapped) std::swap(p.x, p.y);
    const DemingLine inverse = line_through(swapped, 1 / delta);
    CHECK_CLOSE(inverse.slope, 1 / line.slope, 1e-12);
    CHECK_CLOSE(inverse.intercept(), -line.intercept() / line.slope, 1e-11);
  }
}

TEST_CASE("the slope keeps its digits at every error ratio") {
  // With delta >> 1 the textbook root (d + r) / (2 Sxy) loses what d and r share; the limit is known.
  const auto points = read_points("pearson_1901.csv");
  const Moments m(points);
  const double least_squares = -0.539577274984;  // y on x, as published with the file
  CHECK_CLOSE(line_through(points, 1e12).slope, least_squares, 1e-11);
  CHECK_CLOSE(line_through(points, 1e-12).slope, m.syy / m.sxy, 1e-11);
}

TEST_CASE("data at 1e6 with differences of 1e-3 give the line of the shifted data") {
  std::mt19937_64 random(13);
  std::vector<Point> points, shifted;
  std::normal_distribution<double> error;
  for (int i = 0; i < 100; ++i) {
    // Multiples of 2^-20 survive the shift unrounded.
    const auto grid = [](double v) { return std::round(v * 1048576) / 1048576; };
    const Point p{grid(0.5 * i), grid(0.5 * i + 1e-3 * error(random))};
    points.push_back(p);
    shifted.push_back({p.x + 1e6, p.y + 1e6});
  }
  const DemingLine a = line_through(points, 1.3), b = line_through(shifted, 1.3);
  CHECK_CLOSE(b.slope - 1, a.slope - 1, 1e-9);
  CHECK_CLOSE(b.mean_difference, a.mean_difference, 1e-9);
  CHECK_CLOSE(residual_variance(shifted, Moments(shifted), b), residual_variance(points, Moments(points), a),
              1e-9);
}

TEST_CASE("the uncertainty of lambda enters as the numeric derivative of the slope says") {
  std::mt19937_64 random(14);
  const auto points = draw(kPlant, 40, random);
  const Moments m(points);
  const double delta = 0.8, step = 1e-6;
  const double up = line_through(points, delta * std::exp(step)).slope;
  const double down = line_through(points, delta * std::exp(-step)).slope;
  const double derivative = (up - down) / (2 * step);
  CHECK_CLOSE(slope_variance_from_ratio(m, line_through(points, delta), 0.2), 0.2 * derivative * derivative,
              1e-6);
}

TEST_CASE("where there is no line there is a reason") {
  CHECK(reason({}) == "too_few_pairs");
  CHECK(reason({{1, 1}, {2, 2}}) == "too_few_pairs");
  CHECK(reason({{5, 7}, {5, 7}, {5, 7}}) == "no_spread");
  CHECK(reason({{1, 1}, {1, 2}, {1, 3}}) == "no_direction");            // all x equal
  CHECK(reason({{0, 1}, {0, -1}, {1, 0}, {-1, 0}}) == "no_direction");  // a round cloud
  CHECK(deming_line(Moments(std::vector<Point>{{0, 2}, {1, 2}, {2, 2}}), 1).slope == 0);
  CHECK_THROWS_AS((void)deming_line(Moments(), 0), std::domain_error);
  CHECK_THROWS_AS((void)deming_line(Moments(), std::nan("")), std::domain_error);
}
