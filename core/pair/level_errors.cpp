#include "core/pair/level_errors.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <vector>

namespace agreed {
namespace {
constexpr std::size_t kLeastPairsForErrors = 40;
constexpr double kLimit = 2.6;  // times 1/sqrt(n-1)

std::vector<double> ranks_of(std::span<const double> values) {
  std::vector<std::size_t> order(values.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(), [&](auto i, auto j) { return values[i] < values[j]; });
  std::vector<double> ranks(values.size());
  for (std::size_t first = 0; first < order.size();) {
    std::size_t end = first + 1;
    while (end < order.size() && !(values[order[first]] < values[order[end]])) ++end;
    const double mean_rank = (static_cast<double>(first) + static_cast<double>(end - 1)) / 2;
    for (std::size_t i = first; i < end; ++i) ranks[order[i]] = mean_rank;
    first = end;
  }
  return ranks;
}
}  // namespace

double rank_correlation(std::span<const double> a, std::span<const double> b) {
  const std::vector<double> ranks_a = ranks_of(a), ranks_b = ranks_of(b);
  std::vector<Point> points;
  for (std::size_t i = 0; i < ranks_a.size(); ++i) points.push_back({ranks_a[i], ranks_b[i]});
  const Moments m(points);
  const double spread = std::sqrt(m.sxx * m.syy);
  return spread > 0 ? m.sxy / spread : 0;
}

bool error_grows_with_level(std::span<const Point> points, const WindowFit& fit) {
  if (points.size() < kLeastPairsForErrors) return false;
  std::vector<double> sizes, levels;
  for (const Point p : points) {
    sizes.push_back(std::abs(fit.residual(p)));
    levels.push_back(fit.fitted(p, {1, 1}));
  }
  return rank_correlation(sizes, levels) > kLimit / std::sqrt(static_cast<double>(points.size()) - 1);
}

}  // namespace agreed
