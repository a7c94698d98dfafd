// The classical chart as a part of a chart: what it tells and what it shows.
//
// Details of check_standard_unstable of a classical chart, in this order; numbers in the measurand's unit:
//   method            classical
//   pattern           single_reading, shift or scatter
//   unit              (only if the measurand has one)
//   signals           of the newest reading, by name
//   value, reading_at the newest reading and its time (RFC 3339)
//   limit_lower, limit_upper
//   moving_range, moving_range_upper
//   mean_before       the centre line
//   mean_after, shift mean since the estimated start; shift = that less the centre line
//   sigma             that the limits rest on
//   readings_since    the estimated start
//   expected_run_length  readings between false signals
#include <algorithm>
#include <cmath>

#include "core/base/rfc3339.hpp"
#include "core/chart/chart_state.hpp"
#include "core/chart/classical/constants.hpp"
#include "core/chart/moving_range.hpp"

namespace agreed {

void Chart::State::judge_by_limits(std::span<const CheckReading> run, std::vector<Finding>& findings) {
  using Turn = classical::Fold::Change;
  classical::Run taken{run.front().measured_at};
  for (const CheckReading& reading : run) taken.add(reading.value);
  const Turn change = classical->fold.take(taken);
  if (classical->fold.completes_baseline()) classical->baseline = stretch.last();
  classical->judged.push_back(classical->fold.newest());
  if (classical->judged.size() > kPointsKept) classical->judged.pop_front();
  switch (change) {
    case Turn::none:
      break;
    case Turn::opened:
    case Turn::pattern_changed:
      findings.push_back(classical_finding());
      break;
    case Turn::ended:
      findings.push_back(calmed(taken.at, "back_to_normal", 0));
      break;
  }
}

void Chart::State::restart_classical(Instant at, std::vector<Finding>& findings) {
  if (classical->fold.alarm()) findings.push_back(calmed(at, "new_stretch", 0));
  classical->fold.restart();
  classical->baseline.reset();
}

bool Chart::State::matters_by_limits() const {
  const classical::Fold& fold = classical->fold;
  if (fold.alarm()->pattern == classical::Pattern::scatter) return true;
  const classical::LimitBasis& basis = *fold.basis();
  const double shift = fold.mean_since_alarm_started() - basis.center;
  const double smallest =
      measurand().allowable ? measurand().allowable->at(basis.center) / 4 : 0.5 * basis.sigma;
  return std::abs(shift) >= chart().smallest_shift.value_or(smallest);
}

Finding Chart::State::classical_finding() const {
  const classical::Fold& fold = classical->fold;
  const classical::JudgedRun& newest_run = fold.newest();
  Finding finding;
  finding.kind = AlertKind::check_standard_unstable;
  finding.subject = subject();
  finding.severity = matters_by_limits() ? Severity::warning : Severity::notice;
  finding.at = points.back().at;
  finding.started_at = fold.alarm_started_at();

  Details& details = finding.details;
  const auto number = [&](const char* name, const std::optional<double>& value) {
    if (value) details.emplace_back(name, *value);
  };
  details.emplace_back("method", "classical");
  details.emplace_back("pattern", to_string(fold.alarm()->pattern));
  if (!measurand().unit.empty()) details.emplace_back("unit", measurand().unit);
  std::vector<std::string> names;
  for (const ChartSignal signal : newest_run.signals.all()) names.emplace_back(to_string(signal));
  details.emplace_back("signals", std::move(names));
  number("value", newest_run.mean);
  details.emplace_back("reading_at", to_rfc3339(points.back().at));
  number("limit_lower", newest_run.lower);
  number("limit_upper", newest_run.upper);
  if (newest_run.moving_range_upper) number("moving_range", newest_run.moving_range);
  number("moving_range_upper", newest_run.moving_range_upper);
  const double mean = fold.mean_since_alarm_started();
  number("mean_before", fold.basis()->center);
  number("mean_after", mean);
  number("shift", mean - fold.basis()->center);
  number("sigma", fold.basis()->sigma);
  number("readings_since", static_cast<double>(fold.runs() - fold.alarm()->first + 1));
  number("expected_run_length", chart().expected.readings);
  return finding;
}

void Chart::State::show_classical(ChartView& view) const {
  const classical::Fold& fold = classical->fold;
  const ClassicalSettings& chosen = chart().classical;
  ClassicalView shown;
  shown.center_given = chosen.center.has_value();
  shown.sigma_given = chosen.center && chosen.sigma;
  view.upper_limit.reset();
  view.lower_limit.reset();
  if (const auto& basis = fold.basis()) {
    shown.center = basis->center;
    shown.sigma = basis->sigma;
    shown.within_runs = basis->within_runs && !shown.sigma_given;
    shown.moving_range_upper = classical::kMovingRangeLimit * kD2 * basis->sigma;
    const int replicates = basis->within_runs ? std::max(1, fold.newest().readings) : 1;
    const double half = classical::kLimitWidth * basis->sigma / std::sqrt(static_cast<double>(replicates));
    view.upper_limit = basis->center + half;
    view.lower_limit = basis->center - half;
  }
  if (shown.sigma_given)
    shown.sigma_degrees_of_freedom = chosen.sigma_degrees_of_freedom;
  else if (shown.sigma && !shown.within_runs)
    shown.sigma_degrees_of_freedom = view.baseline.sigma_degrees_of_freedom;
  if (fold.alarm()) {
    view.pattern = to_string(fold.alarm()->pattern);
    shown.alarm_started_at = fold.alarm_started_at();
    shown.shift = fold.mean_since_alarm_started() - fold.basis()->center;
  }
  view.change = {};
  view.precision = {};
  for (std::size_t i = 0; i < view.points.size(); ++i) {
    const classical::JudgedRun& run = classical->judged[i];
    ChartPoint& point = view.points[i];
    point.upper = run.upper;
    point.lower = run.lower;
    point.signals = run.signals.all();
    point.classical = run;
  }
  view.classical = shown;
}

}  // namespace agreed
