#include "core/chart/stretch.hpp"

#include <cmath>
#include <limits>
#include <utility>

namespace agreed {
namespace {
double held_in(double squares) {
  return std::min(squares, kLargestDeviation * kLargestDeviation);
}

// Steps of 0 are none.
void keep_smaller(double& smallest, double step) {
  if (step > 0 && (smallest <= 0 || step < smallest)) smallest = step;
}
}  // namespace

Stretch::Stretch(int split_memory, std::optional<double> resolution, const Carried& carried,
                 std::int64_t point_before)
    : split_memory_(split_memory), resolution_(resolution), carried_(carried) {
  for (int after = split_memory; after > 0; --after) reciprocal_.push_back(1.0 / after);
  reciprocal_.push_back(0);
  Prefix empty;
  empty.point = point_before;
  empty.step = carried.step;
  empty.within_step = carried.within_step;
  push(empty);
}

void Stretch::push(const Prefix& prefix) {
  sum_.push_back(prefix.sums.sum);
  squares_.push_back(prefix.sums.squares);
  deviation_.push_back(prefix.deviation);
  inverse_.push_back(prefix.sums.n > 0 ? 1.0 / static_cast<double>(prefix.sums.n) : 0.0);
  const std::int64_t degrees = carried_.degrees + std::max<std::int64_t>(prefix.sums.n - 1, 0);
  inverse_degrees_.push_back(degrees > 0 ? 1.0 / static_cast<double>(degrees) : 0.0);
  rest_.push_back({prefix.ranges, prefix.step, prefix.shares, prefix.within_step, prefix.sums.within,
                   prefix.run, prefix.at, prefix.point});
}

Prefix Stretch::prefix(std::size_t j) const {
  const Rest& rest = rest_[j];
  Prefix prefix;
  prefix.sums = {before(j), sum_[j], squares_[j], rest.within};
  prefix.deviation = deviation_[j];
  prefix.ranges = rest.ranges;
  prefix.step = rest.step;
  prefix.shares = rest.shares;
  prefix.within_step = rest.within_step;
  prefix.run = rest.run;
  prefix.at = rest.at;
  prefix.point = rest.point;
  return prefix;
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

void Stretch::append(const Run& run, std::int64_t point) {
  if (count() == 0) {
    reference_ = run.mean;
    first_at_ = run.at;
  }
  const double deviation = std::clamp(run.mean - reference_, -kLargestDeviation, kLargestDeviation);
  const double step = smallest_step_to(deviation);
  Prefix next = last();
  if (next.sums.n > 0) next.ranges += std::abs(deviation - next.deviation);
  next.run = run;
  next.run.squares = held_in(run.squares);
  next.sums.add(deviation, {run.replicates - 1, next.run.squares});
  keep_smaller(next.step, step);
  keep_smaller(next.within_step, run.step);
  next.shares += 1.0 / run.replicates;
  next.deviation = deviation;
  next.at = run.at;
  next.point = point;
  push(next);
  if (held() > static_cast<std::size_t>(split_memory_)) {
    for (auto* array : {&sum_, &squares_, &deviation_, &inverse_, &inverse_degrees_}) array->pop_front();
    rest_.pop_front();
    ++block_;
  }
}

Run Stretch::run_at(const Prefix& reading) const {
  Run run = reading.run;
  run.mean = reference_ + reading.deviation;
  return run;
}

// The sums go on from `start`, which knows nothing of what is taken out: subtracting a gross reading again
// would leave its rounding errors behind.
std::int64_t Stretch::set_aside(const Prefix& start, std::size_t last) {
  const std::int64_t taken = before(last) - start.sums.n;
  std::vector<std::pair<Run, std::int64_t>> kept;
  for (std::size_t j = last + 1; j <= held(); ++j) kept.emplace_back(run_at(prefix(j)), rest_[j].point);

  const std::int64_t position = start.sums.n - block_;
  const std::size_t size = position >= 0 ? static_cast<std::size_t>(position) + 1 : 0;
  for (auto* array : {&sum_, &squares_, &deviation_, &inverse_, &inverse_degrees_}) array->truncate(size);
  rest_.truncate(size);
  if (size == 0) {
    block_ = start.sums.n;
    push(start);
  }
  for (const auto& [run, point] : kept) append(run, point);
  return taken;
}

}  // namespace agreed
