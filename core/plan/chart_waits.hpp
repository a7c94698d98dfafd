#pragma once
// How many readings a chart as configured needs to tell a lasting step: the service's own chart
// (core/chart/chart.hpp, change_point or classical, its run lengths, split memory and resolution) is fed
// simulated readings until its alert opens.
//
// One life: `before` readings in control, independent and normal, rounded to the configured decimals (where
// the level lies between two roundings is drawn anew each time); then further ones until no alert is open;
// then the step, and readings until an alert opens. So a false alert before the step counts for nothing, but
// what it set aside is gone, as in service; one after it counts as telling it. A chart that is not calm after
// ten times `before` (at least 100) readings more would not tell a step at all: not noticed. The wait is
// counted from a step just after a reading: wait x `every` is the longest time it can have lasted.
//
// Each reading is a run of one; for runs of replicates `sd` is that of a run's mean. Lots and reference
// values play no part. Cost: about 3 us a reading, most of it for the splits remembered.
#include "core/base/settings.hpp"
#include "core/plan/trial.hpp"

namespace agreed::plan {

struct ChartStep {
  double size = 0;   ///< of the step, in the measurand's unit, of either sign; 0: waits until a false alert
  double sd = 0;     ///< of one reading, > 0
  int before = 100;  ///< readings in control before it, >= 0
};

/// Of that chart. Throws std::invalid_argument for an sd that is not positive and finite, a size that is not
/// finite or a negative `before`, std::out_of_range for no such chart. `settings` may go.
[[nodiscard]] Trial chart_trial(const Settings& settings, ChartIndex chart, const ChartStep& step);

}  // namespace agreed::plan
