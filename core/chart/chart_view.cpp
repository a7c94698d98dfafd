// What a chart shows.
#include "core/chart/chart_view.hpp"

#include <cmath>

#include "core/chart/chart.hpp"
#include "core/chart/chart_state.hpp"
#include "core/chart/heavy_tails.hpp"
#include "core/chart/moving_range.hpp"
#include "core/chart/serial_correlation.hpp"

namespace agreed {
namespace {
constexpr std::int64_t kShortBaseline = 30;
// Lag-1 correlation of independent readings exceeds this over sqrt(n) once in twenty times.
constexpr double kCorrelated = 1.65;
}  // namespace

const char* to_string(ChartState state) {
  switch (state) {
    case ChartState::learning:
      return "learning";
    case ChartState::stable:
      return "stable";
    case ChartState::unstable:
      return "unstable";
  }
  return "";
}

const char* to_string(ChartSignal signal) {
  switch (signal) {
    case ChartSignal::single_high:
      return "single_high";
    case ChartSignal::single_low:
      return "single_low";
    case ChartSignal::shift_up:
      return "shift_up";
    case ChartSignal::shift_down:
      return "shift_down";
    case ChartSignal::scatter_up:
      return "scatter_up";
    case ChartSignal::above_limit:
      return "above_limit";
    case ChartSignal::below_limit:
      return "below_limit";
    case ChartSignal::moving_range_above_limit:
      return "moving_range_above_limit";
    case ChartSignal::range_above_limit:
      return "range_above_limit";
    case ChartSignal::standard_deviation_above_limit:
      return "standard_deviation_above_limit";
    case ChartSignal::ewma:
      return "ewma";
    case ChartSignal::cusum:
      return "cusum";
    case ChartSignal::same_side:
      return "same_side";
    case ChartSignal::trend:
      return "trend";
    case ChartSignal::two_of_three_beyond:
      return "two_of_three_beyond";
    case ChartSignal::four_of_five_beyond:
      return "four_of_five_beyond";
    case ChartSignal::alternating:
      return "alternating";
    case ChartSignal::near_centre:
      return "near_centre";
    case ChartSignal::away_from_centre:
      return "away_from_centre";
  }
  return "";
}

ChartPoint Chart::State::shown(const PointRecord& record) const {
  ChartPoint point;
  point.measured_at = record.at;
  point.value = record.value;
  point.moving_range = record.moving_range;
  if (record.t) point.score = level_score(*record.t, record.counted);
  point.precision_score = record.precision_score;
  if (record.degrees > 0 && record.sd > 0) {
    const bool of_one_lot = record.degrees < record.learned;
    const double limit = of_one_lot ? level_limit_at(record.learned + 1, level.h) : level.h;
    const double half = prediction_factor(record.learned, record.degrees, limit) * record.sd;
    point.upper = record.mean + half;
    point.lower = record.mean - half;
  }
  if (record.level_signal) point.signals.push_back(*record.level_signal);
  if (record.scatter_signal) point.signals.push_back(ChartSignal::scatter_up);
  point.replicates = record.replicates;
  if (record.replicates > 1) point.within_sd = std::sqrt(record.within_squares / (record.replicates - 1));
  point.set_aside = record.set_aside;
  point.starts_stretch = record.starts_stretch;
  return point;
}

ChangeView Chart::State::change_view() const {
  ChangeView view;
  view.limit = level.h;
  view.limit_now = level_limit(stretch.count());
  view.extrapolated = level.extrapolated;
  view.in_control_run_length = chart().level_run_length;
  if (has_level_splits(stretch)) view.score = level_score(best_level_split(stretch).t, stretch.counted());
  return view;
}

PrecisionView Chart::State::precision_view() const {
  PrecisionView view;
  view.limit = precision.h;
  view.extrapolated = precision.extrapolated;
  view.in_control_run_length = chart().precision_run_length;
  if (!has_precision_splits(stretch)) return view;
  std::vector<float> room;
  const PrecisionSplit best = best_precision_split(stretch, room);
  view.score = best.score;
  view.ratio_of_sd = best.ratio_of_sd;
  return view;
}

BaselineView Chart::State::baseline_view() const {
  BaselineView view;
  const Prefix known = learned();
  const std::int64_t n = known.sums.n;
  view.readings = static_cast<int>(n);
  view.needed = chart().baseline;
  view.set_aside = set_aside;
  if (n == 0) return view;
  view.from = stretch.first_at();
  view.to = known.at;
  view.center = mean_of(known.sums);
  const Carried& carried = stretch.carried();
  view.carried_over = carried.degrees;
  view.sd_degrees_of_freedom = degrees_of(known.sums);
  if (view.sd_degrees_of_freedom > 0)
    view.sd = std::sqrt((known.sums.about_mean() + carried.squares) /
                        static_cast<double>(view.sd_degrees_of_freedom));
  const std::int64_t ranges = n - 1 + carried.range_count;
  if (ranges == 0) return view;
  view.moving_range_mean = (known.ranges + carried.ranges) / static_cast<double>(ranges);
  view.sigma = *view.moving_range_mean / kD2;
  view.sigma_degrees_of_freedom = moving_range_degrees_of_freedom(ranges + 1);
  return view;
}

std::optional<ComparedMean> Chart::State::compared_mean() const {
  const Sums known = learned().sums;
  if (known.n == 0 || degrees_of(known) == 0) return {};
  return ComparedMean{mean_of(known), sd_of(known), known.n};
}

std::optional<ReferenceView> Chart::State::reference_view() const {
  const std::optional<ReferenceValue>& reference = present_lot().reference;
  if (!reference) return {};
  ReferenceView view;
  view.value = reference->value;
  view.expanded_uncertainty = reference->expanded_uncertainty;
  view.coverage_factor = reference->coverage_factor;
  view.biased = biased;
  const Sums known = learned().sums;
  if (known.n == 0) return view;
  view.bias = mean_of(known) - reference->value;
  if (const auto mean = compared_mean()) {
    view.normalised_error = normalised_error(*mean, *reference);
    view.allowed_bias = allowed_bias(*mean, *reference, level.h);
  }
  return view;
}

std::optional<ReplicatesView> Chart::State::replicates_view() const {
  const Prefix known = learned();
  const Carried& carried = stretch.carried();
  const Within within = known.sums.within + carried.within;
  if (within.degrees == 0) return {};
  ReplicatesView view;
  view.runs = known.sums.n + carried.runs;
  view.per_run = static_cast<double>(view.runs) / (known.shares + carried.shares);
  view.within_sd = std::sqrt(within.squares / static_cast<double>(within.degrees));
  view.within_degrees_of_freedom = within.degrees;
  view.tell_precision = stretch.by_replicates();
  const Repeatability now = repeatability();
  if (now.within_degrees_of_freedom > 0)
    view.between_sd = std::sqrt(std::max(0.0, now.variance - now.within_variance));
  return view;
}

std::optional<MeanLevel> Chart::State::level_of(const Prefix& known) const {
  if (known.sums.n < 2) return {};
  const double sd = sd_of(known.sums);
  return MeanLevel{stretch.first_at(),  known.at, known.sums.n,
                   mean_of(known.sums), sd * sd,  degrees_of(known.sums)};
}

namespace {
EffectView effect_of(const MeanLevel& before, const MeanLevel& after, const Measurand& measurand) {
  EffectView view;
  view.at = before.from;
  view.readings_before = before.readings;
  view.readings_after = after.readings;
  view.mean_before = before.mean;
  view.mean_after = after.mean;
  view.difference = after.mean - before.mean;
  if (const auto difference = difference_of(before, after)) {
    view.low = difference->low;
    view.high = difference->high;
  }
  if (measurand.allowable) view.allowable = measurand.allowable->at(before.mean);
  return view;
}
}  // namespace

std::optional<MeanLevel> Chart::State::present_level() const {
  const Prefix known = learned();
  return known.sums.n < kLeastForEffect ? std::nullopt : level_of(known);
}

std::optional<EffectView> Chart::State::intervention_effect() const {
  const auto now = present_level();
  if (!now || !level_before) return {};
  EffectView view = effect_of(*level_before, *now, measurand());
  view.what = intervention.what;
  view.at = intervention.at;
  return view;
}

std::optional<EffectView> Chart::State::since_first() const {
  const auto now = present_level();
  if (!now || !first_level) return {};
  return effect_of(*first_level, *now, measurand());
}

// The published lag-1 correlation, about the mean of the readings learned, so that whoever works it out again
// finds it; what a change that stands adds to it is not among those.
std::optional<double> Chart::State::correlation() const {
  const std::int64_t held = learned().sums.n - stretch.block();
  return held > 0 ? serial_correlation(stretch, static_cast<std::size_t>(held)) : std::nullopt;
}

void Chart::State::add_warnings(ChartView& view) const {
  const Sums known = learned().sums;
  const auto add = [&view](const char* name, std::vector<std::pair<std::string, double>> numbers) {
    view.warnings.emplace_back(name);
    view.warning_numbers.push_back({name, std::move(numbers)});
  };
  if (known.n < kShortBaseline)
    add("baseline_short", {{"readings", static_cast<double>(known.n)}, {"needed", kShortBaseline}});
  if (known.n >= kLeastForRepeatability && degrees_of(known) > 0) {
    const double squares = known.about_mean() + stretch.carried().squares;
    const double sd = std::sqrt(squares / static_cast<double>(degrees_of(known)));
    if (stretch.resolution() > sd) add("resolution_too_coarse", {{"step", stretch.resolution()}, {"sd", sd}});
  }
  const auto n = static_cast<double>(known.n);
  const double correlated_from = kCorrelated / std::sqrt(n);
  if (view.serial_correlation && known.n >= kShortBaseline && *view.serial_correlation > correlated_from)
    add("serial_correlation", {{"correlation", *view.serial_correlation},
                               {"from", correlated_from},
                               {"readings", n},
                               {"run_length", run_length_if_correlated(*view.serial_correlation)},
                               {"instead_of", kUncorrelatedRunLength}});
  if (const auto tails = heavy_tails(stretch, known.n))
    add("heavy_tails", {{"kurtosis_excess", tails->excess},
                        {"from", tails->from},
                        {"readings", static_cast<double>(tails->readings)},
                        {"degrees_of_freedom", tails->degrees},
                        {"run_length", run_length_with_tails(tails->degrees, level.h)},
                        {"instead_of", chart().level_run_length}});
}

ChartView Chart::view() const {
  const State& s = *state_;
  ChartView view;
  view.index = s.index;
  view.lot = s.present_lot().id;
  view.state = state();
  view.baseline = s.baseline_view();
  view.change = s.change_view();
  view.precision = s.precision_view();
  view.reference = s.reference_view();
  if (s.alarm) {
    const Change change = s.describe();
    view.pattern = change.pattern;
    view.change.started_at = change.started_at;
    view.change.started_between = change.started_between;
    view.change.shift = change.shift();
  }
  const Sums known = s.learned().sums;
  if (s.has_limits(known) && s.sd_of(known) > 0) {
    const double half =
        prediction_factor(known.n, s.degrees_of(known), s.level_limit(known.n + 1)) * s.sd_of(known);
    view.upper_limit = s.mean_of(known) + half;
    view.lower_limit = s.mean_of(known) - half;
  }
  if (known.n > 0 && s.degrees_of(known) > 0) view.smallest_shift = s.smallest_shift(known);
  view.serial_correlation = s.correlation();
  if (has_level_splits(s.stretch))
    view.correlation_allowed_for = residual_correlation(s.stretch, best_level_split(s.stretch).position);
  view.replicates = s.replicates_view();
  view.intervention_effect = s.intervention_effect();
  view.since_first = s.since_first();
  s.add_warnings(view);
  view.marks = s.marks;
  view.points.reserve(s.points.size());
  for (const PointRecord& record : s.points.all()) view.points.push_back(s.shown(record));
  if (s.classical) s.show_classical(view);
  return view;
}

}  // namespace agreed
