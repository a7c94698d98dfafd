#include "core/pair/jackknife.hpp"

#include <cmath>
#include <vector>

namespace agreed {
namespace {
// Below this part of a sum of squares the difference S - n/(n-1) c^2 has lost too many digits.
constexpr double kNearlyAllLeft = 1e-3;

double slope_refitted_without(std::span<const Point> points, std::size_t left_out, double delta) {
  std::vector<Point> others(points.begin(), points.end());
  others.erase(others.begin() + static_cast<std::ptrdiff_t>(left_out));
  const Moments m(others);
  return deming_slope(m.sxx, m.sxy, m.syy, delta);
}
}  // namespace

std::optional<LineCovariance> jackknife_covariance(std::span<const Point> points, const Moments& m,
                                                   const DemingLine& line) {
  const double n = m.n;
  const double weight = n / (n - 1);
  const double least_sxx = kNearlyAllLeft * m.sxx, least_syy = kNearlyAllLeft * m.syy;
  // Deviations from the estimates of all pairs: of the line at mean_x, and of the slope.
  double sum_a = 0, sum_b = 0, sum_aa = 0, sum_ab = 0, sum_bb = 0;
  for (std::size_t i = 0; i < points.size(); ++i) {
    const Point c = m.centred(points[i]);
    const double sxx = m.sxx - weight * c.x * c.x;
    const double sxy = m.sxy - weight * c.x * c.y;
    const double syy = m.syy - weight * c.y * c.y;
    const double slope = sxx > least_sxx && syy > least_syy ? deming_slope(sxx, sxy, syy, line.delta)
                                                            : slope_refitted_without(points, i, line.delta);
    // The mean moves by -c/(n-1), so the line at the old mean_x moves by this:
    const double a = (slope * c.x - c.y) / (n - 1);
    const double b = slope - line.slope;
    sum_a += a;
    sum_b += b;
    sum_aa += a * a;
    sum_ab += a * b;
    sum_bb += b * b;
  }
  if (!(std::isfinite(sum_a) && std::isfinite(sum_bb))) return std::nullopt;
  const double factor = (n - 1) / n;
  return LineCovariance{factor * (sum_aa - sum_a * sum_a / n), factor * (sum_ab - sum_a * sum_b / n),
                        factor * (sum_bb - sum_b * sum_b / n)};
}

}  // namespace agreed
