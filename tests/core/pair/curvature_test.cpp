#include "core/pair/curvature.hpp"

#include "core/pair/pair.hpp"
#include "tests/core/pair/support.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
WindowFit line_through(const std::vector<Point>& points) {
  Window window(1000, std::nullopt);
  std::int64_t serial = 0;
  for (const Point p : points) window.insert(p, {Instant{}, ++serial});
  ErrorRatio ratio;
  ratio.known = true;
  return fit_window(window, ratio);
}
}  // namespace

TEST_CASE("the p of curvature equals that of the polynomial fit") {
  // Computed with numpy.linalg.lstsq and scipy.stats.f: F = 92.7827 on (1, 6).
  const std::vector<Point> points = {{9.0, 9.05},   {9.7, 9.66},   {10.4, 10.31},
                                     {11.2, 11.08}, {11.9, 11.83}, {12.7, 12.66},
                                     {13.3, 13.31}, {14.1, 14.19}, {14.8, 14.97}};
  const auto p = curvature_p(points, line_through(points));
  REQUIRE(p);
  CHECK_CLOSE(*p, 7.168202780661263e-05, 1e-8);
}

TEST_CASE("a straight relation is called curved in about one window in a hundred") {
  std::mt19937_64 random(61);
  constexpr int windows = 2000;
  int curved = 0, bent = 0;
  for (int i = 0; i < windows; ++i) {
    auto points = draw({}, 60, random);
    curved += *curvature_p(points, line_through(points)) < 0.01;
    for (Point& p : points) p.y += 0.01 * (p.x - 12) * (p.x - 12);
    bent += *curvature_p(points, line_through(points)) < 0.01;
  }
  CHECK(std::abs(curved - 0.01 * windows) < 3 * std::sqrt(0.01 * windows));
  CHECK(bent > 0.95 * windows);
}

TEST_CASE("what cannot be asked is not answered") {
  const std::vector<Point> three = {{9, 9.1}, {10, 9.9}, {11, 11.05}};
  CHECK_FALSE(curvature_p(three, line_through(three)));
  const std::vector<Point> two_levels = {{9, 9}, {9, 9}, {9, 9}, {11, 11}, {11, 11}, {11, 11}};
  CHECK_FALSE(curvature_p(two_levels, line_through(two_levels)));
}
