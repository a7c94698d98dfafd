#include "core/plan/weakest_change.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

namespace agreed::plan {
namespace {
constexpr int kPortion = 10;
// A test ends when the share told is so many standard errors from one half, on so many trials at least.
constexpr double kClear = 3.5;
constexpr int kLeastTrials = 16;
constexpr int kMostConfirmations = 6;
}  // namespace

WeakestChange::WeakestChange(int count, std::function<Candidate(int)> make, const Trials& trials)
    : count_(count), make_(std::move(make)), trials_(trials) {
  if (count_ > 0) begin(count_ - 1);
}

void WeakestChange::begin(int index) {
  index_ = index;
  told_ = 0;
  Candidate candidate = make_(index);
  if (candidate.readings < 1) {
    // Not one reading comes in time: a trial that never tells says the same.
    candidate.trial = [](RandomNormal&, int) { return std::optional<int>(); };
  }
  Trials trials = trials_;
  trials.horizon = std::max(1, candidate.readings);
  run_.emplace(std::move(candidate.trial), trials);
}

bool WeakestChange::is_clear() const {
  const int made = run_->waits().trials();
  return made >= kLeastTrials && std::abs(2 * told_ - made) > kClear * std::sqrt(made);
}

bool WeakestChange::step() {
  if (!run_) return false;
  bool more = true;
  for (int i = 0; i < kPortion && more; ++i) {
    more = run_->step();
    told_ = run_->waits().trials() - run_->waits().unnoticed();
    if (!confirming_ && is_clear()) more = false;
  }
  if (more) return true;
  if (confirming_)
    conclude_confirmation();
  else
    conclude_test(told_ >= noticed_share * run_->waits().trials());
  return run_.has_value();
}

void WeakestChange::conclude_test(bool enough) {
  ++tests_;
  (enough ? holds_ : fails_) = index_;
  if (holds_ < 0) return run_.reset();  // the strongest is not enough
  if (holds_ - fails_ > 1) return begin(fails_ + (holds_ - fails_) / 2);
  confirming_ = true;
  begin(holds_);
}

void WeakestChange::conclude_confirmation() {
  share_ = share_of(told_, run_->waits().trials());
  ++confirmations_;
  if (share_.value >= noticed_share) {
    found_ = index_;
    return run_.reset();
  }
  if (confirmations_ == kMostConfirmations || index_ + 1 == count_) return run_.reset();
  begin(index_ + 1);
}

double WeakestChange::share_done() const {
  if (!run_) return 1;
  const double tests = std::log2(static_cast<double>(count_)) + 1;
  constexpr double confirmation = 0.5;
  if (!confirming_) return (1 - confirmation) * std::min(1.0, tests_ / tests);
  return 1 - confirmation + confirmation * run_->share_done() * (confirmations_ == 0 ? 1 : 0.9);
}

}  // namespace agreed::plan
