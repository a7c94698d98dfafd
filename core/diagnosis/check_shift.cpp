#include "core/diagnosis/check_shift.hpp"

#include <algorithm>
#include <cmath>

namespace agreed {
namespace {
constexpr int kLeastBefore = 2;
constexpr int kLeastDegrees = 3;
constexpr double kLeastVariance = 1e-200;  // equal readings of unknown resolution

struct Side {
  int n = 0;
  double mean = 0, squares = 0;

  void add(double value) {
    const double d = value - mean;
    mean += d / ++n;
    squares += d * (value - mean);
  }
};

double error_factor(int before, int after) {
  return std::sqrt(1.0 / before + 1.0 / after);
}
}  // namespace

CheckShift check_shift(std::span<const CheckPoint> readings, const Moment& moment, double resolution) {
  const auto split = std::partition_point(readings.begin(), readings.end(),
                                          [&](const CheckPoint& r) { return r.at < moment.started_at; });
  Side before, after;
  for (auto r = split; r != readings.begin();) {
    --r;
    if (r->at < moment.since) break;
    if (!r->set_aside) before.add(r->value);
    if (r->starts_stretch) break;
  }
  for (auto r = split; r != readings.end() && !r->starts_stretch; ++r) after.add(r->value);

  CheckShift result;
  result.before = before.n;
  result.after = after.n;
  const int df = std::max(0, before.n - 1) + std::max(0, after.n - 1);
  if (before.n < kLeastBefore || df < kLeastDegrees) return result;
  const double variance =
      std::max({(before.squares + after.squares) / df, resolution * resolution / 12, kLeastVariance}) * df /
      (df - 2);
  result.sd = std::sqrt(variance);
  if (after.n > 0) result.shift = {after.mean - before.mean, *result.sd * error_factor(before.n, after.n)};
  return result;
}

CheckShift pooled(std::span<const CheckShift> charts) {
  const bool any_shift =
      std::any_of(charts.begin(), charts.end(), [](const CheckShift& c) { return c.shift.has_value(); });
  CheckShift result;
  double weights = 0, weighted = 0, variances = 0;
  int known = 0;
  for (const CheckShift& chart : charts) {
    if (any_shift ? !chart.shift : !chart.sd) continue;
    ++known;
    result.before += chart.before;
    result.after += chart.after;
    variances += *chart.sd * *chart.sd;
    if (!chart.shift) continue;
    const double weight = 1 / (chart.shift->se * chart.shift->se);
    weights += weight;
    weighted += weight * chart.shift->value;
  }
  if (known == 0) return result;
  result.sd = std::sqrt(variances / known);
  if (!any_shift) return result;
  result.shift = {weighted / weights, 1 / std::sqrt(weights)};
  // Of one standard with all these readings, which would tell as much.
  result.sd = result.shift->se / error_factor(result.before, result.after);
  return result;
}

std::optional<Shift> after_more_readings(const CheckShift& checks, int more, double expected) {
  if (!checks.sd || checks.before == 0) return std::nullopt;
  const int after = checks.after + more;
  if (after == 0) return std::nullopt;
  const double known = checks.shift ? checks.after * checks.shift->value : 0.0;
  const int counted = checks.shift ? after : more;
  if (counted == 0) return std::nullopt;
  return Shift{(known + more * expected) / counted, *checks.sd * error_factor(checks.before, counted)};
}

}  // namespace agreed
