#pragma once
// How many pairs a comparison as configured needs to tell a lasting step of y - x: the service's own
// comparison (core/pair/comparison.hpp: pair chart, window, outliers, verdict) is fed simulated pairs.
//
// One life: `before` pairs on the relation (the established one if configured, else y = x), further ones
// until neither alert is open (at most ten times `before`, at least 100; after that: not noticed), then the
// step, and pairs until the pair chart tells (agreement_drifting) and until agreement_lost. A false alert
// before the step counts for nothing. Cost: about 8 us a pair, so a life to `agreement_lost` with a window of
// 200 about 2 ms.
#include "core/base/settings.hpp"
#include "core/plan/pair_conditions.hpp"
#include "core/plan/trial.hpp"

namespace agreed::plan {

struct PairStep {
  double size = 0;  ///< of the step of y - x, in the measurand's unit, of either sign
  int before = 60;  ///< pairs before it, >= 0
};

class PairWaits {
 public:
  /// Throws std::invalid_argument as require_valid does, for a size that is not finite, a negative `before`,
  /// a count or horizon below 1; std::out_of_range for no such comparison. `settings` may go.
  PairWaits(const Settings& settings, ComparisonIndex comparison, const PairConditions& conditions,
            const PairStep& step, const Trials& trials);

  /// One more trial; false when all were made.
  bool step();
  [[nodiscard]] double share_done() const;

  /// Pairs until agreement_drifting.
  [[nodiscard]] const Waits& drifting() const { return drifting_; }
  /// Whether agreement can be lost by this step: it leaves the allowable difference at some decision level.
  /// Else nobody waits for it and lost() has no trials.
  [[nodiscard]] bool may_be_lost() const { return may_be_lost_; }
  /// Pairs until agreement_lost.
  [[nodiscard]] const Waits& lost() const { return lost_; }
  /// Pairs until the first of the two.
  [[nodiscard]] const Waits& either() const { return either_; }

 private:
  Settings settings_;  ///< of this comparison alone
  PairConditions conditions_;
  PairStep step_;
  Trials trials_;
  bool may_be_lost_ = false;
  Waits drifting_, lost_, either_;
};

/// Pairs until agreement_drifting or agreement_lost, whichever comes first: what `notice.hpp` asks of a
/// comparison.
[[nodiscard]] Trial pair_trial(const Settings& settings, ComparisonIndex comparison,
                               const PairConditions& conditions, const PairStep& step);

}  // namespace agreed::plan
