#include "core/chart/classical/fold.hpp"

#include <algorithm>
#include <cmath>

#include "core/chart/classical/constants.hpp"
#include "core/chart/moving_range.hpp"

namespace agreed::classical {
namespace {
constexpr std::size_t kRunsKept = 500;

double spread_of(const Run& run, RunSpread spread) {
  return spread == RunSpread::range ? run.range() : run.sd();
}

double spread_limit(int readings, RunSpread spread) {
  if (spread == RunSpread::range) {
    const RangeConstants c = range_constants(readings);
    return c.d2 + kLimitWidth * c.d3;
  }
  const double c = c4(readings);
  return c + kLimitWidth * std::sqrt(1 - c * c);
}
}  // namespace

Fold::Fold(const ChartSettings& chart) : chart_(&chart), now_(beginning()) {}

Fold::Progress Fold::beginning() const {
  Progress progress;
  progress.basis = known(progress.baseline);
  return progress;
}

std::optional<LimitBasis> Fold::known(const Baseline& baseline) const {
  const ClassicalSettings& given = chart_->classical;
  if (given.center && given.sigma) return LimitBasis{*given.center, *given.sigma, true};
  if (baseline.runs() < chart_->baseline) return {};
  std::optional<LimitBasis> found = baseline.basis();
  if (found && given.center) found->center = *given.center;
  return found;
}

void Fold::restart() {
  now_ = beginning();
  completes_baseline_ = false;
  means_ = {};
}

Fold::Change Fold::take(const Run& run) {
  const std::optional<ClassicalAlarm> was = now_.alarm;
  means_.push_back({run.at, run.mean});
  if (means_.size() > kRunsKept) means_.pop_front();
  const bool had_limits = now_.basis.has_value();
  learn(run);
  now_.judged = {};
  now_.judged.readings = run.readings;
  now_.judged.mean = run.mean;
  if (now_.runs > 1) now_.judged.moving_range = std::abs(run.mean - now_.previous_mean);
  if (had_limits) judge(run);
  now_.previous_mean = run.mean;
  now_.previous_readings = run.readings;
  if (!was) return now_.alarm ? Change::opened : Change::none;
  if (!now_.alarm) return Change::ended;
  return now_.alarm->pattern == was->pattern ? Change::none : Change::pattern_changed;
}

void Fold::learn(const Run& run) {
  ++now_.runs;
  completes_baseline_ = false;
  if (now_.learned) return;
  now_.baseline.add(run, chart_->classical.run_spread);
  if (!now_.basis) now_.basis = known(now_.baseline);
  now_.learned = now_.baseline.runs() >= chart_->baseline && now_.basis.has_value();
  completes_baseline_ = now_.learned;
}

void Fold::judge(const Run& run) {
  const LimitBasis& basis = *now_.basis;
  const ClassicalSettings& chosen = chart_->classical;
  JudgedRun& judged = now_.judged;
  const double sd =
      basis.within_runs ? basis.sigma / std::sqrt(static_cast<double>(run.readings)) : basis.sigma;
  judged.upper = basis.center + kLimitWidth * sd;
  judged.lower = basis.center - kLimitWidth * sd;
  const LevelTests::Result level = now_.tests.take((run.mean - basis.center) / sd, chosen);
  judged.signals = level.signals;
  if (chosen.ewma_weight && chosen.ewma_width) {
    const Ewma& ewma = now_.tests.ewma;
    const double half = sd * ewma.limit(*chosen.ewma_weight, *chosen.ewma_width);
    judged.ewma = basis.center + sd * ewma.value;
    judged.ewma_upper = basis.center + half;
    judged.ewma_lower = basis.center - half;
  }
  if (chosen.cusum_allowance && chosen.cusum_limit) {
    judged.cusum_upper = now_.tests.cusum.upper;
    judged.cusum_lower = now_.tests.cusum.lower;
  }
  judge_spread(run);
  follow(level);
}

void Fold::judge_spread(const Run& run) {
  const LimitBasis& basis = *now_.basis;
  const RunSpread measure = chart_->classical.run_spread;
  JudgedRun& judged = now_.judged;
  if (basis.within_runs && run.readings >= 2) {
    judged.spread = spread_of(run, measure);
    judged.spread_upper = spread_limit(run.readings, measure) * basis.sigma;
    judged.signals.add(measure == RunSpread::range ? ChartSignal::range_above_limit
                                                   : ChartSignal::standard_deviation_above_limit,
                       *judged.spread > *judged.spread_upper);
    return;
  }
  // Moving ranges of single readings and of means of several are not of one kind.
  const bool comparable = !basis.within_runs || now_.previous_readings <= 1;
  if (!comparable) return;
  judged.moving_range_upper = kMovingRangeLimit * kD2 * basis.sigma;
  judged.signals.add(ChartSignal::moving_range_above_limit,
                     judged.moving_range && *judged.moving_range > *judged.moving_range_upper);
}

// A shift is the lasting explanation: once told, it replaces a single reading or scatter told before.
void Fold::follow(const LevelTests::Result& level) {
  const Signals& signals = now_.judged.signals;
  std::optional<ClassicalAlarm>& alarm = now_.alarm;
  const std::int64_t first = std::max<std::int64_t>(1, now_.runs - level.readings + 1);
  if (!alarm) {
    if (signals.any()) alarm = ClassicalAlarm{signals.pattern(), first, 0};
    return;
  }
  if (!signals.any()) {
    if (++alarm->quiet >= chart_->clear_after) alarm.reset();
    return;
  }
  alarm->quiet = 0;
  if (signals.shift() && alarm->pattern != Pattern::shift)
    *alarm = {Pattern::shift, std::min(first, alarm->first), 0};
}

std::size_t Fold::alarm_position() const {
  const std::int64_t oldest = now_.runs - static_cast<std::int64_t>(means_.size()) + 1;
  return static_cast<std::size_t>(std::max<std::int64_t>(0, now_.alarm->first - oldest));
}

Instant Fold::alarm_started_at() const {
  return means_[alarm_position()].at;
}

double Fold::mean_since_alarm_started() const {
  double mean = 0;
  int count = 0;
  for (std::size_t i = alarm_position(); i < means_.size(); ++i) mean += (means_[i].value - mean) / ++count;
  return mean;
}

}  // namespace agreed::classical
