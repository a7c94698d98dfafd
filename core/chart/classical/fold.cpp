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

Fold::Fold(const ChartSettings& chart) : chart_(&chart), before_(beginning()), now_(before_) {}

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
  run_ = {};
  before_ = now_ = beginning();
  means_ = {};
}

Fold::Change Fold::take(Instant at, double value) {
  const bool replicate = run_.readings > 0 && at == run_.at;
  const std::optional<ClassicalAlarm> was = now_.alarm;
  if (replicate) {
    now_ = before_;
    means_.truncate(means_.size() - 1);
  } else {
    before_ = now_;
    run_ = {};
    run_.at = at;
  }
  run_.add(value);
  means_.push_back({at, run_.mean});
  if (means_.size() > kRunsKept) means_.pop_front();
  const bool had_limits = now_.basis.has_value();
  learn(now_);
  now_.judged = {};
  if (had_limits) {
    judge(now_);
  } else {
    now_.judged.readings = run_.readings;
    now_.judged.mean = run_.mean;
    if (now_.runs > 1) now_.judged.moving_range = std::abs(run_.mean - now_.previous_mean);
  }
  now_.previous_mean = run_.mean;
  now_.previous_readings = run_.readings;
  if (!was) return now_.alarm ? Change::opened : Change::none;
  if (!now_.alarm) return Change::ended;
  return now_.alarm->pattern == was->pattern ? Change::none : Change::pattern_changed;
}

void Fold::learn(Progress& progress) const {
  ++progress.runs;
  if (progress.learned) return;
  progress.baseline.add(run_, chart_->classical.run_spread);
  if (!progress.basis) progress.basis = known(progress.baseline);
  progress.learned = progress.baseline.runs() >= chart_->baseline && progress.basis.has_value();
}

void Fold::judge(Progress& progress) const {
  const LimitBasis& basis = *progress.basis;
  const ClassicalSettings& chosen = chart_->classical;
  JudgedRun& judged = progress.judged;
  judged.readings = run_.readings;
  judged.mean = run_.mean;
  const double sd =
      basis.within_runs ? basis.sigma / std::sqrt(static_cast<double>(run_.readings)) : basis.sigma;
  judged.upper = basis.center + kLimitWidth * sd;
  judged.lower = basis.center - kLimitWidth * sd;
  const LevelTests::Result level = progress.tests.take((run_.mean - basis.center) / sd, chosen);
  judged.signals = level.signals;
  if (chosen.ewma_weight && chosen.ewma_width) {
    const Ewma& ewma = progress.tests.ewma;
    const double half = sd * ewma.limit(*chosen.ewma_weight, *chosen.ewma_width);
    judged.ewma = basis.center + sd * ewma.value;
    judged.ewma_upper = basis.center + half;
    judged.ewma_lower = basis.center - half;
  }
  if (chosen.cusum_allowance && chosen.cusum_limit) {
    judged.cusum_upper = progress.tests.cusum.upper;
    judged.cusum_lower = progress.tests.cusum.lower;
  }
  judge_spread(progress);
  follow(progress, level);
}

void Fold::judge_spread(Progress& progress) const {
  const LimitBasis& basis = *progress.basis;
  const RunSpread measure = chart_->classical.run_spread;
  JudgedRun& judged = progress.judged;
  if (progress.runs > 1) judged.moving_range = std::abs(run_.mean - progress.previous_mean);
  if (basis.within_runs && run_.readings >= 2) {
    judged.spread = spread_of(run_, measure);
    judged.spread_upper = spread_limit(run_.readings, measure) * basis.sigma;
    judged.signals.add(measure == RunSpread::range ? ChartSignal::range_above_limit
                                                   : ChartSignal::standard_deviation_above_limit,
                       *judged.spread > *judged.spread_upper);
    return;
  }
  // Moving ranges of single readings and of means of several are not of one kind.
  const bool comparable = !basis.within_runs || progress.previous_readings <= 1;
  if (!comparable) return;
  judged.moving_range_upper = kMovingRangeLimit * kD2 * basis.sigma;
  judged.signals.add(ChartSignal::moving_range_above_limit,
                     judged.moving_range && *judged.moving_range > *judged.moving_range_upper);
}

// A shift is the lasting explanation: once told, it replaces a single reading or scatter told before.
void Fold::follow(Progress& progress, const LevelTests::Result& level) const {
  const Signals& signals = progress.judged.signals;
  std::optional<ClassicalAlarm>& alarm = progress.alarm;
  const std::int64_t first = std::max<std::int64_t>(1, progress.runs - level.readings + 1);
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
