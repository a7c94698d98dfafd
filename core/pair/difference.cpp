#include "core/pair/difference.hpp"

#include <cmath>
#include <vector>

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

// Of at least two differences.
AgreementLimits limits_of(std::span<const double> differences) {
  const double n = static_cast<double>(differences.size()), first = differences.front();
  double mean = 0;
  for (const double d : differences) mean += d - first;
  mean = first + mean / n;
  double squares = 0;
  for (const double d : differences) squares += (d - mean) * (d - mean);

  AgreementLimits limits;
  limits.mean = mean;
  limits.sd = std::sqrt(squares / (n - 1));
  const double t = t_quantile_of_tail(kTail, n - 1);
  const double mean_se = limits.sd / std::sqrt(n);
  const double limit_se = limits.sd * std::sqrt(1 / n + kZ * kZ / (2 * (n - 1)));
  limits.mean_interval = {mean - t * mean_se, mean + t * mean_se};
  limits.lower_limit = mean - kZ * limits.sd;
  limits.upper_limit = mean + kZ * limits.sd;
  limits.lower_limit_interval = {limits.lower_limit - t * limit_se, limits.lower_limit + t * limit_se};
  limits.upper_limit_interval = {limits.upper_limit - t * limit_se, limits.upper_limit + t * limit_se};
  return limits;
}

std::optional<AgreementLimits> percent_limits(std::span<const Point> points) {
  std::vector<double> percents;
  percents.reserve(points.size());
  for (const Point p : points) {
    const double level = p.x + (p.y - p.x) / 2;
    if (!(level > 0)) return std::nullopt;
    percents.push_back(100 * (p.y - p.x) / level);
  }
  return limits_of(percents);
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
  std::vector<double> differences;
  differences.reserve(points.size());
  for (const Point p : points) differences.push_back(p.y - p.x);

  DifferenceView view;
  static_cast<AgreementLimits&>(view) = limits_of(differences);
  const double n = static_cast<double>(points.size()), mean_se = view.sd / std::sqrt(n);
  if (mean_se > 0) view.paired_t_p = 2 * t_tail(std::abs(view.mean) / mean_se, n - 1);
  if (!allowable) return view;
  count_within(points, *allowable, view);
  if (!allowable->absolute && allowable->percent) view.percent = percent_limits(points);
  return view;
}

}  // namespace agreed
