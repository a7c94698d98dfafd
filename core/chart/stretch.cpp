#include "core/chart/stretch.hpp"

#include <cmath>
#include <limits>

namespace agreed {
namespace {
// Squares of deviations up to this can be summed without overflow; no unit makes a larger one a measurement.
constexpr double kLargestDeviation = 1e120;
// Readings closer than this part of their size are the same: conversions of units leave such gaps.
constexpr double kSameReading = 1e-12;
}  // namespace

Stretch::Stretch(int split_memory, std::optional<double> resolution)
    : split_memory_(split_memory), resolution_(resolution) {
  for (int after = split_memory; after > 0; --after) reciprocal_.push_back(1.0 / after);
  reciprocal_.push_back(0);
  push(Prefix{});
}

void Stretch::push(const Prefix& prefix) {
  sum_.push_back(prefix.sums.sum);
  squares_.push_back(prefix.sums.squares);
  deviation_.push_back(prefix.deviation);
  inverse_.push_back(prefix.sums.n > 0 ? 1.0 / static_cast<double>(prefix.sums.n) : 0.0);
  inverse_degrees_.push_back(prefix.sums.n > 1 ? 1.0 / static_cast<double>(prefix.sums.n - 1) : 0.0);
  rest_.push_back({prefix.ranges, prefix.step, prefix.at, prefix.point});
}

Prefix Stretch::prefix(std::size_t j) const {
  const Rest& rest = rest_[j];
  return {{before(j), sum_[j], squares_[j]}, deviation_[j], rest.ranges, rest.step, rest.at, rest.point};
}

double Stretch::smallest_step_to(double deviation) const {
  const double same = kSameReading * std::abs(reference_);
  const double* held_deviation = deviation_.data();
  double smallest = std::numeric_limits<double>::infinity();
  for (std::size_t j = block_ > 0 ? 0 : 1; j <= held(); ++j) {
    const double gap = std::abs(held_deviation[j] - deviation);
    if (gap > same && gap < smallest) smallest = gap;
  }
  return std::isfinite(smallest) ? smallest : 0.0;
}

void Stretch::append(Instant at, double value, std::int64_t point) {
  if (count() == 0) {
    reference_ = value;
    first_at_ = at;
  }
  const double deviation = std::clamp(value - reference_, -kLargestDeviation, kLargestDeviation);
  const double step = smallest_step_to(deviation);
  Prefix next = last();
  if (next.sums.n > 0) next.ranges += std::abs(deviation - next.deviation);
  next.sums.add(deviation);
  if (step > 0 && (next.step <= 0 || step < next.step)) next.step = step;
  next.deviation = deviation;
  next.at = at;
  next.point = point;
  push(next);
  if (held() > static_cast<std::size_t>(split_memory_)) {
    for (auto* array : {&sum_, &squares_, &deviation_, &inverse_, &inverse_degrees_}) array->pop_front();
    rest_.pop_front();
    ++block_;
  }
}

// The sums go on from `start`, which knows nothing of what is taken out: subtracting a gross reading again
// would leave its rounding errors behind.
std::int64_t Stretch::set_aside(const Prefix& start, std::size_t last) {
  const std::int64_t taken = before(last) - start.sums.n;
  std::vector<Prefix> kept;
  for (std::size_t j = last + 1; j <= held(); ++j) kept.push_back(prefix(j));

  const std::int64_t position = start.sums.n - block_;
  const std::size_t size = position >= 0 ? static_cast<std::size_t>(position) + 1 : 0;
  for (auto* array : {&sum_, &squares_, &deviation_, &inverse_, &inverse_degrees_}) array->truncate(size);
  rest_.truncate(size);
  if (size == 0) {
    block_ = start.sums.n;
    push(start);
  }
  for (const Prefix& reading : kept) append(reading.at, reference_ + reading.deviation, reading.point);
  return taken;
}

}  // namespace agreed
