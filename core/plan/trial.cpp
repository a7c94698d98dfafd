#include "core/plan/trial.hpp"

#include <stdexcept>
#include <utility>

namespace agreed::plan {

TrialRun::TrialRun(Trial trial, const Trials& trials)
    : trial_(std::move(trial)), trials_(trials), waits_(trials.horizon) {
  if (trials.count < 1) throw std::invalid_argument("count: expected at least one trial");
}

bool TrialRun::step() {
  if (waits_.trials() == trials_.count) return false;
  RandomNormal draw(trials_.seed, static_cast<std::uint64_t>(waits_.trials()));
  waits_.add(trial_(draw, trials_.horizon));
  return true;
}

double TrialRun::share_done() const {
  return static_cast<double>(waits_.trials()) / trials_.count;
}

}  // namespace agreed::plan
