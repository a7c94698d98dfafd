// What a chart shows.
#include "core/chart/chart_view.hpp"

#include <cmath>

#include "core/chart/chart.hpp"
#include "core/chart/chart_state.hpp"
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
  if (record.t) point.score = level_score(*record.t, record.count);
  point.precision_score = record.precision_score;
  if (record.learned >= kLeastForLimits && record.sd > 0) {
    const double half = prediction_factor(record.learned, level.h) * record.sd;
    point.upper = record.mean + half;
    point.lower = record.mean - half;
  }
  if (record.level_signal) point.signals.push_back(*record.level_signal);
  if (record.scatter_signal) point.signals.push_back(ChartSignal::scatter_up);
  point.set_aside = record.set_aside;
  point.starts_stretch = record.starts_stretch;
  return point;
}

ChangeView Chart::State::change_view() const {
  ChangeView view;
  view.limit = level.h;
  view.extrapolated = level.extrapolated;
  view.in_control_run_length = chart().level_run_length;
  if (has_level_splits(stretch)) view.score = level_score(best_level_split(stretch).t, stretch.count());
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
  if (n < 2) return view;
  view.sd = std::sqrt(known.sums.about_mean() / static_cast<double>(n - 1));
  view.moving_range_mean = known.ranges / static_cast<double>(n - 1);
  view.sigma = *view.moving_range_mean / kD2;
  view.sigma_degrees_of_freedom = moving_range_degrees_of_freedom(n);
  return view;
}

// After ISO 13528 and ISO/IEC 17043, coverage factor 2.
std::optional<ReferenceView> Chart::State::reference_view() const {
  const std::optional<ReferenceValue>& reference = present_lot().reference;
  if (!reference) return {};
  ReferenceView view{reference->value, reference->expanded_uncertainty, reference->coverage_factor, {}, {}};
  const Sums known = learned().sums;
  if (known.n == 0) return view;
  view.bias = mean_of(known) - reference->value;
  if (known.n < 2) return view;
  const double sd = sd_of(known);
  const double given = reference->expanded_uncertainty.value_or(0) / reference->coverage_factor;
  const double u = std::sqrt(sd * sd / static_cast<double>(known.n) + given * given);
  if (u > 0) view.normalised_error = *view.bias / (2 * u);
  return view;
}

std::vector<std::string> Chart::State::warnings(const std::optional<double>& correlation) const {
  std::vector<std::string> warnings;
  const Sums known = learned().sums;
  if (known.n < kShortBaseline) warnings.emplace_back("baseline_short");
  if (known.n >= kLeastForRepeatability &&
      stretch.resolution() > std::sqrt(known.about_mean() / static_cast<double>(known.n - 1)))
    warnings.emplace_back("resolution_too_coarse");
  if (correlation && known.n >= kShortBaseline &&
      *correlation > kCorrelated / std::sqrt(static_cast<double>(known.n)))
    warnings.emplace_back("serial_correlation");
  return warnings;
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
  const Prefix known = s.learned();
  if (known.sums.n >= kLeastForLimits && s.sd_of(known.sums) > 0) {
    const double half = prediction_factor(known.sums.n, s.level.h) * s.sd_of(known.sums);
    view.upper_limit = s.mean_of(known.sums) + half;
    view.lower_limit = s.mean_of(known.sums) - half;
  }
  const auto learned_held = known.sums.n - s.stretch.block();
  if (learned_held > 0)
    view.serial_correlation = serial_correlation(s.stretch, static_cast<std::size_t>(learned_held));
  view.warnings = s.warnings(view.serial_correlation);
  view.marks = s.marks;
  view.points.reserve(s.points.size());
  for (const PointRecord& record : s.points.all()) view.points.push_back(s.shown(record));
  return view;
}

}  // namespace agreed
