#include "core/pair/passing_bablok.hpp"

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <limits>
#include <vector>

#include "core/base/distributions.hpp"

namespace agreed {
namespace {
constexpr double kEqualWithin = 4 * std::numeric_limits<double>::epsilon();
constexpr double kInfinite = std::numeric_limits<double>::infinity();

// Calls `use` with every slope that counts.
template <class Use>
void each_slope(std::span<const Point> points, Use use) {
  for (std::size_t i = 0; i < points.size(); ++i)
    for (std::size_t j = i + 1; j < points.size(); ++j) {
      const Point a = points[i], b = points[j];
      const double dx = a.x - b.x, dy = a.y - b.y;
      const double least_x = kEqualWithin * (std::abs(a.x) + std::abs(b.x));
      const double least_y = kEqualWithin * (std::abs(a.y) + std::abs(b.y));
      if (std::abs(dx) <= least_x) {
        if (std::abs(dy) > least_y) use(dy > 0 ? kInfinite : -kInfinite);
      } else if (std::abs(dx + dy) > least_x + least_y) {
        use(dy / dx);
      }
    }
}

constexpr std::size_t kSlopesPerSample = 64;

struct Counted {
  std::size_t n = 0, below_minus_one = 0;
  std::vector<double> sample;  ///< every 64th, sorted
};

Counted count_slopes(std::span<const Point> points) {
  Counted counted;
  each_slope(points, [&](double slope) {
    if (counted.n++ % kSlopesPerSample == 0) counted.sample.push_back(slope);
    if (slope < -1) ++counted.below_minus_one;
  });
  std::sort(counted.sample.begin(), counted.sample.end());
  return counted;
}

// The slopes around some ranks.
struct Middle {
  std::vector<double> slopes;
  std::size_t below = 0;  ///< how many slopes are smaller than all of these
};

Middle between(std::span<const Point> points, double least, double most) {
  Middle middle;
  each_slope(points, [&](double slope) {
    if (slope < least)
      ++middle.below;
    else if (slope <= most)
      middle.slopes.push_back(slope);
  });
  return middle;
}

// The slopes of ranks `low` to `high` (from 1 on) and some more. Only few of many lie there; keeping and
// ranking all costs far more than working them out twice, so a sample says which to keep, and all are kept
// where it was wrong.
Middle around_ranks(std::span<const Point> points, const Counted& counted, std::size_t low,
                    std::size_t high) {
  const std::vector<double>& sample = counted.sample;
  const auto margin = static_cast<std::size_t>(2 * std::sqrt(static_cast<double>(sample.size()))) + 1;
  const std::size_t first = low / kSlopesPerSample, last = high / kSlopesPerSample + margin;
  Middle middle = between(points, first > margin ? sample[first - margin] : -kInfinite,
                          last < sample.size() ? sample[last] : kInfinite);
  if (middle.below < low && high <= middle.below + middle.slopes.size()) return middle;
  return between(points, -kInfinite, kInfinite);
}

// The value of a rank, from 1 on, that is `from` or above; everything below `from` is in its place already.
double of_rank(std::vector<double>& values, std::size_t rank, std::size_t from = 1) {
  const auto begin = values.begin();
  const auto at = begin + static_cast<std::ptrdiff_t>(rank - 1);
  std::nth_element(begin + static_cast<std::ptrdiff_t>(from - 1), at, values.end());
  return *at;
}

// Mean of the values of ranks `low` and `high`, which are the same or neighbours; both are `from` or above.
double middle_of(std::vector<double>& values, std::size_t low, std::size_t high, std::size_t from) {
  const double lower = of_rank(values, low, from);
  if (high == low) return lower;
  const double upper = *std::min_element(values.begin() + static_cast<std::ptrdiff_t>(low), values.end());
  return lower + (upper - lower) / 2;
}

double median(std::vector<double>& values) {
  return middle_of(values, (values.size() + 1) / 2, values.size() / 2 + 1, 1);
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
  line.reason = no_robust_line::no_slope;
  const Counted counted = count_slopes(points);
  const std::size_t n = counted.n, shift = counted.below_minus_one;
  const std::size_t m1 = lower_rank(points.size(), n, confidence);
  const std::size_t low_middle = (n + 1) / 2 + shift, high_middle = n / 2 + 1 + shift;
  if (high_middle > n) return line;
  const std::size_t low_rank = m1 + shift, high_rank = n - m1 + 1 + shift;
  const bool ranked = m1 > 0 && high_rank <= n;
  auto [slopes, below] =
      around_ranks(points, counted, ranked ? low_rank : low_middle, ranked ? high_rank : high_middle);
  const double low = ranked ? of_rank(slopes, low_rank - below) : -kInfinite;
  line.slope = middle_of(slopes, low_middle - below, high_middle - below, ranked ? low_rank - below : 1);
  const double high = ranked ? of_rank(slopes, high_rank - below, low_middle - below) : kInfinite;
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
