#include "core/pair/jackknife.hpp"

#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
// n refits from the pairs themselves.
LineCovariance refitted(const std::vector<Point>& points, double delta) {
  const Moments all(points);
  const double n = static_cast<double>(points.size());
  std::vector<double> a, b;
  for (std::size_t i = 0; i < points.size(); ++i) {
    auto others = points;
    others.erase(others.begin() + static_cast<std::ptrdiff_t>(i));
    const DemingLine line = deming_line(Moments(others), delta);
    REQUIRE((line.exists() || points.size() == 3));
    const Moments m(others);
    const double slope = deming_slope(m.sxx, m.sxy, m.syy, delta);
    a.push_back(m.mean_difference() + (slope - 1) * (all.mean_x() - m.mean_x()));
    b.push_back(slope);
  }
  double mean_a = 0, mean_b = 0;
  for (std::size_t i = 0; i < a.size(); ++i) {
    mean_a += a[i] / n;
    mean_b += b[i] / n;
  }
  LineCovariance sum;
  for (std::size_t i = 0; i < a.size(); ++i) {
    sum.mean += (a[i] - mean_a) * (a[i] - mean_a) * (n - 1) / n;
    sum.mean_slope += (a[i] - mean_a) * (b[i] - mean_b) * (n - 1) / n;
    sum.slope += (b[i] - mean_b) * (b[i] - mean_b) * (n - 1) / n;
  }
  return sum;
}

void check_against_refits(const std::vector<Point>& points, double delta) {
  const Moments m(points);
  const auto fast = jackknife_covariance(points, m, deming_line(m, delta));
  REQUIRE(fast);
  const LineCovariance slow = refitted(points, delta);
  CHECK_CLOSE(fast->mean, slow.mean, 1e-8);
  CHECK_CLOSE(fast->slope, slow.slope, 1e-8);
  CHECK(std::abs(fast->mean_slope - slow.mean_slope) < 1e-8 * std::sqrt(slow.mean * slow.slope));
}
}  // namespace

TEST_CASE("Pearson's ten points: jackknife standard errors at seven error ratios") {
  const auto points = read_points("pearson_1901.csv");
  const Moments m(points);
  for (const auto& row : read_rows("pearson_1901_deming.csv")) {
    CAPTURE(row[0]);
    const auto covariance = jackknife_covariance(points, m, deming_line(m, row[0]));
    REQUIRE(covariance);
    CHECK_CLOSE(std::sqrt(covariance->slope), row[3], 1e-9);
    CHECK_CLOSE(std::sqrt(covariance->difference_at(0 - m.mean_x())), row[4], 1e-9);
  }
}

TEST_CASE("NIST's ozone monitors: jackknife standard errors and covariance") {
  const auto points = read_points("norris_ozone.csv");
  const Moments m(points);
  const auto covariance = jackknife_covariance(points, m, deming_line(m, 1));
  REQUIRE(covariance);
  // Computed outside this project, to these digits.
  CHECK_CLOSE(std::sqrt(covariance->slope), 0.0005154115941594, 1e-8);
  CHECK_CLOSE(std::sqrt(covariance->difference_at(0 - m.mean_x())), 0.1660235582426, 1e-8);
  CHECK_CLOSE(covariance->intercept_slope(m.mean_x()), -6.128817487603e-05, 1e-8);
}

TEST_CASE("the fast jackknife equals n refits") {
  std::mt19937_64 random(21);
  for (const std::size_t n : {3u, 4u, 10u, 57u, 200u})
    for (const double delta : {0.05, 1.0, 30.0}) {
      CAPTURE(n);
      CAPTURE(delta);
      check_against_refits(draw({9, 15, 0.5, 0.9, 0.1, 0.1}, n, random), delta);
    }
}

TEST_CASE("a pair that carries nearly all of the spread is refitted, not subtracted") {
  std::mt19937_64 random(22);
  auto points = draw({9, 15, 0, 1, 0.02, 0.02}, 30, random);
  points.push_back({1e7, 1e7 + 3});
  check_against_refits(points, 1);
}

TEST_CASE("without a line when one pair is left out there is no jackknife") {
  const std::vector<Point> points{{1, 1}, {1, 1}, {1, 1}, {2, 2.5}};
  const Moments m(points);
  CHECK_FALSE(jackknife_covariance(points, m, deming_line(m, 1)));
}
