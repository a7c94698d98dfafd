#include "core/plan/pair_waits.hpp"

#include <algorithm>
#include <cmath>
#include <memory>
#include <stdexcept>
#include <vector>

#include "core/pair/comparison.hpp"

namespace agreed::plan {
namespace {
constexpr int kLeastUntilStill = 100, kUntilStill = 10;

void require_valid(const PairConditions& conditions, const PairStep& step) {
  require_valid(conditions);
  if (!std::isfinite(step.size)) throw std::invalid_argument("size: expected a finite step");
  if (step.before < 0) throw std::invalid_argument("before: expected a number of pairs, 0 or more");
}

/// That comparison alone; what only time makes an alert of plays no part.
Settings settings_of(const Settings& all, ComparisonIndex index) {
  Settings alone;
  alone.site = all.site;
  alone.analyzers = all.analyzers;
  alone.measurands = all.measurands;
  alone.comparisons = {all.of(index)};
  alone.comparisons.front().prove_within.reset();
  return alone;
}

EstablishedLine relation_of(const Settings& alone) {
  return alone.comparisons.front().relation.value_or(EstablishedLine{});
}

bool leaves_allowable(const Settings& alone, double step) {
  const Measurand& measurand = alone.of(alone.comparisons.front().measurand);
  const EstablishedLine line = relation_of(alone);
  const auto leaves = [&](double level) {
    const double bias = line.intercept + (line.slope - 1) * level + step;
    return std::abs(bias) > measurand.allowable->at(level);
  };
  const auto& levels = measurand.decision_levels;
  return measurand.allowable && std::any_of(levels.begin(), levels.end(), leaves);
}

/// One comparison from its first pair on.
class PairLife {
 public:
  PairLife(const Settings& settings, const PairConditions& conditions, RandomNormal& draw)
      : conditions_(conditions),
        relation_(relation_of(settings)),
        ratio_(ratio_as_known(conditions.ratio, draw)),
        draw_(draw),
        comparison_(settings, ComparisonIndex{0}) {
    const auto& decimals = settings.of(settings.comparisons.front().measurand).decimals;
    if (decimals) resolution_ = std::pow(10.0, -*decimals);
  }

  void measure(double shift) {
    now_ += std::chrono::hours(1);
    findings_.clear();
    comparison_.add(draw_pair(conditions_, relation_, shift, resolution_, now_, draw_), ratio_, findings_);
  }
  [[nodiscard]] bool still() const { return !comparison_.changed(); }
  /// By the newest pair.
  [[nodiscard]] bool told(AlertKind kind) const {
    return std::any_of(findings_.begin(), findings_.end(),
                       [kind](const Finding& f) { return f.kind == kind && f.holds; });
  }

 private:
  const PairConditions& conditions_;
  EstablishedLine relation_;
  ErrorRatio ratio_;
  double resolution_ = 0;
  RandomNormal& draw_;
  Comparison comparison_;
  Instant now_{};
  std::vector<Finding> findings_;
};

struct Told {
  std::optional<int> drifting, lost;

  [[nodiscard]] std::optional<int> first() const {
    if (!drifting || !lost) return drifting ? drifting : lost;
    return std::min(*drifting, *lost);
  }
};

/// False: it does not get still before the step.
bool lives_until_step(PairLife& life, int before) {
  for (int i = 0; i < before; ++i) life.measure(0);
  for (int left = std::max(kLeastUntilStill, kUntilStill * before); !life.still(); --left) {
    if (left == 0) return false;
    life.measure(0);
  }
  return true;
}

enum class Until { first, both };

Told follow(PairLife& life, double step, int horizon, bool may_be_lost, Until until) {
  Told told;
  const auto waiting = [&] {
    if (until == Until::first) return !told.first();
    return !told.drifting || (may_be_lost && !told.lost);
  };
  for (int wait = 1; wait <= horizon && waiting(); ++wait) {
    life.measure(step);
    if (!told.drifting && life.told(AlertKind::agreement_drifting)) told.drifting = wait;
    if (!told.lost && life.told(AlertKind::agreement_lost)) told.lost = wait;
  }
  return told;
}
}  // namespace

PairWaits::PairWaits(const Settings& settings, ComparisonIndex comparison, const PairConditions& conditions,
                     const PairStep& step, const Trials& trials)
    : settings_(settings_of(settings, comparison)),
      conditions_(conditions),
      step_(step),
      trials_(trials),
      may_be_lost_(leaves_allowable(settings_, step.size)),
      drifting_(trials.horizon),
      lost_(trials.horizon),
      either_(trials.horizon) {
  require_valid(conditions, step);
  if (trials.count < 1) throw std::invalid_argument("count: expected at least one trial");
}

bool PairWaits::step() {
  if (drifting_.trials() == trials_.count) return false;
  RandomNormal draw(trials_.seed, static_cast<std::uint64_t>(drifting_.trials()));
  PairLife life(settings_, conditions_, draw);
  Told told;
  if (lives_until_step(life, step_.before))
    told = follow(life, step_.size, trials_.horizon, may_be_lost_, Until::both);
  drifting_.add(told.drifting);
  if (may_be_lost_) lost_.add(told.lost);
  either_.add(told.first());
  return true;
}

double PairWaits::share_done() const {
  return static_cast<double>(drifting_.trials()) / trials_.count;
}

Trial pair_trial(const Settings& settings, ComparisonIndex comparison, const PairConditions& conditions,
                 const PairStep& step) {
  require_valid(conditions, step);
  const auto alone = std::make_shared<const Settings>(settings_of(settings, comparison));
  return [alone, conditions, step](RandomNormal& draw, int horizon) {
    PairLife life(*alone, conditions, draw);
    if (!lives_until_step(life, step.before)) return std::optional<int>();
    return follow(life, step.size, horizon, true, Until::first).first();
  };
}

}  // namespace agreed::plan
