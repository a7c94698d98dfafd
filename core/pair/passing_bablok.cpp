#include "core/pair/passing_bablok.hpp"

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <limits>
#include <vector>

#include "core/base/distributions.hpp"

namespace agreed {
namespace {
constexpr double kRounding = 4 * std::numeric_limits<double>::epsilon();
constexpr double kInfinite = std::numeric_limits<double>::infinity();

struct Slopes {
  std::vector<double> kept;
  std::size_t below_minus_one = 0;
};

Slopes slopes_of(std::span<const Point> points) {
  Slopes slopes;
  slopes.kept.reserve(points.size() * (points.size() - 1) / 2);
  for (std::size_t i = 0; i < points.size(); ++i)
    for (std::size_t j = i + 1; j < points.size(); ++j) {
      const Point a = points[i], b = points[j];
      const double dx = a.x - b.x, dy = a.y - b.y;
      const double least_x = kRounding * (std::abs(a.x) + std::abs(b.x));
      const double least_y = kRounding * (std::abs(a.y) + std::abs(b.y));
      double slope = 0;
      if (std::abs(dx) <= least_x) {
        if (std::abs(dy) <= least_y) continue;
        slope = dy > 0 ? kInfinite : -kInfinite;
      } else {
        if (std::abs(dx + dy) <= least_x + least_y) continue;
        slope = dy / dx;
      }
      slopes.kept.push_back(slope);
      if (slope < -1) ++slopes.below_minus_one;
    }
  return slopes;
}

// The value of a rank, from 1 on, that is `from` or above; everything below `from` is in its place already.
double of_rank(std::vector<double>& values, std::size_t rank, std::size_t from = 1) {
  const auto begin = values.begin();
  const auto at = begin + static_cast<std::ptrdiff_t>(rank - 1);
  std::nth_element(begin + static_cast<std::ptrdiff_t>(from - 1), at, values.end());
  return *at;
}

// Median of the values shifted up by `shift` ranks, ranks below `from` being in their place.
double shifted_median(std::vector<double>& values, std::size_t shift, std::size_t from) {
  const std::size_t n = values.size(), low = (n + 1) / 2 + shift;
  if (low > n) return kInfinite;
  const double lower = of_rank(values, low, from);
  if (n % 2 == 1) return lower;
  if (low + 1 > n) return kInfinite;
  const double upper = *std::min_element(values.begin() + static_cast<std::ptrdiff_t>(low), values.end());
  return lower + (upper - lower) / 2;
}

double median(std::vector<double>& values) {
  return shifted_median(values, 0, 1);
}

// Median of (y - level) - slope (x - level).
double bias_of(std::span<const Point> points, double slope, double level) {
  std::vector<double> values;
  values.reserve(points.size());
  for (const Point p : points) values.push_back((p.y - p.x) - (slope - 1) * (p.x - level));
  return median(values);
}

// Ranks, from 1 on and before the shift, of the lower limit; 0: too few slopes.
std::size_t lower_rank(std::size_t pairs, std::size_t slopes, double confidence) {
  const double n = static_cast<double>(pairs);
  const double c = normal_quantile_of_tail((1 - confidence) / 2) * std::sqrt(n * (n - 1) * (2 * n + 5) / 18);
  const double rank = std::round((static_cast<double>(slopes) - c) / 2);
  return rank >= 1 ? static_cast<std::size_t>(rank) : 0;
}
}  // namespace

PassingBablok passing_bablok(std::span<const Point> points, double confidence) {
  PassingBablok line;
  if (points.size() < 3) {
    line.reason = no_robust_line::too_few_pairs;
    return line;
  }
  auto [slopes, shift] = slopes_of(points);
  line.reason = no_robust_line::no_slope;
  if (slopes.empty()) return line;

  const std::size_t m1 = lower_rank(points.size(), slopes.size(), confidence);
  const std::size_t low_rank = m1 + shift, high_rank = slopes.size() - m1 + 1 + shift;
  const bool ranked = m1 > 0 && high_rank <= slopes.size();
  const double low = ranked ? of_rank(slopes, low_rank) : -kInfinite;
  line.slope = shifted_median(slopes, shift, ranked ? low_rank : 1);
  const double high = ranked ? of_rank(slopes, high_rank, low_rank) : kInfinite;
  if (!std::isfinite(line.slope)) {
    line.slope = 1;
    return line;
  }
  line.reason = {};
  line.intercept = bias_of(points, line.slope, 0);
  if (!std::isfinite(low) || !std::isfinite(high)) return line;
  line.slope_interval = {low, high};
  line.intercept_interval = robust_bias_at(points, line, 0).interval;
  return line;
}

RobustBias robust_bias_at(std::span<const Point> points, const PassingBablok& line, double level) {
  const double one = bias_of(points, line.slope_interval->at(1), level);
  const double other = bias_of(points, line.slope_interval->at(0), level);
  return {line.intercept + (line.slope - 1) * level, {std::min(one, other), std::max(one, other)}};
}

}  // namespace agreed
