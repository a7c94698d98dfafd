#include "core/chart/classical/baseline.hpp"

#include "core/chart/classical/constants.hpp"
#include "core/chart/moving_range.hpp"

namespace agreed::classical {
namespace {
struct Weighted {
  double sigma = 0, weight = 0;
};

Weighted estimate(const Run& run, RunSpread spread) {
  if (spread == RunSpread::range) {
    const RangeConstants c = range_constants(run.readings);
    return {run.range() / c.d2, c.d2 * c.d2 / (c.d3 * c.d3)};
  }
  const double c = c4(run.readings);
  return {run.sd() / c, c * c / (1 - c * c)};
}
}  // namespace

void Baseline::add(const Run& run, RunSpread spread) {
  if (runs_ == 0)
    first_ = run.mean;
  else
    ranges_ += std::abs(run.mean - previous_);
  previous_ = run.mean;
  sum_ += run.mean - first_;
  ++runs_;
  if (run.readings < 2) return;
  ++replicated_;
  const Weighted own = estimate(run, spread);
  within_ += own.weight * own.sigma;
  within_weight_ += own.weight;
}

std::optional<LimitBasis> Baseline::basis() const {
  if (runs_ < 2) return {};
  LimitBasis found;
  found.center = first_ + sum_ / runs_;
  found.within_runs = 2 * replicated_ >= runs_;
  found.sigma = found.within_runs ? within_ / within_weight_ : ranges_ / (runs_ - 1) / kD2;
  if (!(found.sigma > 0 && std::isfinite(found.sigma))) return {};
  return found;
}

}  // namespace agreed::classical
