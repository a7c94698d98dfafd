#include "core/plan/waits.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>

namespace agreed::plan {
namespace {
// Ranks so many standard errors below and above are compared; their distance is twice as many of the
// quantile's.
constexpr double kRankErrors = 2;
// Agresti and Coull: two successes and two failures more than were seen.
constexpr double kAddedTrials = 4;
// n times a share must not become the next rank by its rounding.
constexpr double kRankRounding = 1e-9;
}  // namespace

Waits::Waits(int horizon) {
  if (horizon < 1) throw std::invalid_argument("horizon: expected at least one reading");
  at_.resize(static_cast<std::size_t>(horizon) + 1);
}

void Waits::add(std::optional<int> wait) {
  if (wait && (*wait < 1 || *wait > horizon()))
    throw std::invalid_argument("wait: expected a reading from the first to the horizon");
  ++trials_;
  if (!wait) return;
  ++at_[static_cast<std::size_t>(*wait)];
  ++noticed_;
}

int Waits::unnoticed() const {
  return trials_ - noticed_;
}

int Waits::at_rank(double rank) const {
  double below = 0;
  for (int wait = 1; wait <= horizon(); ++wait) {
    below += at_[static_cast<std::size_t>(wait)];
    if (below >= rank - kRankRounding) return wait;
  }
  return horizon() + 1;
}

std::optional<Simulated> Waits::quantile(double share) const {
  if (!(share > 0 && share < 1)) throw std::invalid_argument("share: expected one between 0 and 1");
  if (trials_ == 0) return std::nullopt;
  const double rank = std::max(1.0, share * trials_);
  const int wait = at_rank(rank);
  if (wait > horizon()) return std::nullopt;
  const double off = kRankErrors * std::sqrt(share * (1 - share) * trials_);
  const int low = at_rank(std::max(1.0, rank - off));
  const int high = at_rank(std::min<double>(trials_, rank + off));
  return Simulated{static_cast<double>(wait), (high - low) / (2 * kRankErrors)};
}

Simulated Waits::noticed_within(int readings) const {
  if (trials_ == 0) throw std::invalid_argument("noticed_within: expected trials");
  int count = 0;
  for (int wait = 1; wait <= std::min(readings, horizon()); ++wait)
    count += at_[static_cast<std::size_t>(wait)];
  return share_of(count, trials_);
}

Simulated share_of(int count, int trials) {
  const double n = trials + kAddedTrials, p = (count + kAddedTrials / 2) / n;
  return {static_cast<double>(count) / trials, std::sqrt(p * (1 - p) / n)};
}

}  // namespace agreed::plan
