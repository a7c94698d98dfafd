#include "core/pair/difference.hpp"

#include <cmath>

#include "core/base/distributions.hpp"

namespace agreed {
namespace {
constexpr double kZ = 1.9599639845400545;  // 0.975 quantile of the normal distribution
constexpr double kTail = 0.025;            // of the 95 % intervals
constexpr double kConfidence = 0.95;

void count_within(std::span<const Point> points, const AllowableDifference& allowable, DifferenceView& view) {
  int count = 0;
  for (const Point p : points)
    if (std::abs(p.y - p.x) <= allowable.at(p.x)) ++count;
  const int of = static_cast<int>(points.size());
  view.within_count = count;
  view.within_of = of;
  view.within_interval = proportion_interval(count, of, kConfidence);
}
}  // namespace

Interval proportion_interval(int count, int of, double confidence) {
  const double tail = (1 - confidence) / 2;
  return {count > 0 ? beta_quantile(tail, count, of - count + 1) : 0.0,
          count < of ? beta_quantile(1 - tail, count + 1, of - count) : 1.0};
}

std::optional<DifferenceView> describe_differences(std::span<const Point> points,
                                                   const std::optional<AllowableDifference>& allowable) {
  if (points.size() < 2) return std::nullopt;
  const double n = static_cast<double>(points.size());
  const double first = points.front().y - points.front().x;
  double mean = 0;
  for (const Point p : points) mean += (p.y - p.x) - first;
  mean = first + mean / n;
  double squares = 0;
  for (const Point p : points) squares += ((p.y - p.x) - mean) * ((p.y - p.x) - mean);

  DifferenceView view;
  view.mean = mean;
  view.sd = std::sqrt(squares / (n - 1));
  const double t = t_quantile_of_tail(kTail, n - 1);
  const double mean_se = view.sd / std::sqrt(n);
  const double limit_se = view.sd * std::sqrt(1 / n + kZ * kZ / (2 * (n - 1)));
  view.mean_interval = {mean - t * mean_se, mean + t * mean_se};
  view.lower_limit = mean - kZ * view.sd;
  view.upper_limit = mean + kZ * view.sd;
  view.lower_limit_interval = {view.lower_limit - t * limit_se, view.lower_limit + t * limit_se};
  view.upper_limit_interval = {view.upper_limit - t * limit_se, view.upper_limit + t * limit_se};
  if (mean_se > 0) view.paired_t_p = 2 * t_tail(std::abs(mean) / mean_se, n - 1);
  if (allowable) count_within(points, *allowable, view);
  return view;
}

}  // namespace agreed
