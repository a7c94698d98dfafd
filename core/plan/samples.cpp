#include "core/plan/samples.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <stdexcept>
#include <utility>

namespace agreed::plan {
namespace {
constexpr int kEvenly = 101;
constexpr double kBetweenLevels = 0.8;  // of the samples, between the lowest and the highest level
constexpr double kAroundLevel = 0.1;    // of a single level, either way
}  // namespace

SampleValues::SampleValues(std::vector<double> values) : values_(std::move(values)) {
  if (!std::all_of(values_.begin(), values_.end(), [](double value) { return std::isfinite(value); }))
    throw std::invalid_argument("values: expected finite true values");
  std::sort(values_.begin(), values_.end());
  if (values_.size() < 2 || !(values_.front() < values_.back()))
    throw std::invalid_argument("values: expected at least two samples that differ");
  const auto count = static_cast<double>(values_.size());
  double off = 0;
  for (const double value : values_) off += value - values_.front();
  mean_ = values_.front() + off / count;
  double squares = 0;
  for (const double value : values_) squares += (value - mean_) * (value - mean_);
  sd_ = std::sqrt(squares / count);
}

SampleValues SampleValues::evenly(double low, double high) {
  if (!(std::isfinite(low) && std::isfinite(high) && low < high))
    throw std::invalid_argument("low, high: expected finite values, low below high");
  std::vector<double> values;
  values.reserve(kEvenly);
  for (int i = 0; i < kEvenly; ++i) values.push_back(std::lerp(low, high, i / (kEvenly - 1.0)));
  return SampleValues(std::move(values));
}

double SampleValues::chance_to_cover(double level, int n) const {
  const auto count = static_cast<double>(values_.size());
  const auto above = std::lower_bound(values_.begin(), values_.end(), level);
  const auto beyond = std::upper_bound(values_.begin(), values_.end(), level);
  const double none_above = 1 - static_cast<double>(values_.end() - above) / count;
  const double none_below = 1 - static_cast<double>(beyond - values_.begin()) / count;
  // Every sample lies on one side at least, so n >= 1 of them never miss both.
  return std::max(0.0, 1 - std::pow(none_above, n) - std::pow(none_below, n));
}

std::optional<SampleValues> around_levels(std::span<const double> decision_levels) {
  if (decision_levels.empty()) return std::nullopt;
  const auto [low, high] = std::minmax_element(decision_levels.begin(), decision_levels.end());
  const double middle = std::midpoint(*low, *high), distance = *high - *low;
  const double half = distance > 0 ? distance / 2 / kBetweenLevels : kAroundLevel * std::abs(middle);
  if (!(half > 0)) return std::nullopt;
  return SampleValues::evenly(middle - half, middle + half);
}

}  // namespace agreed::plan
