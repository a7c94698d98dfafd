// What a chart tells of a change.
//
// Details of check_standard_unstable while it holds, in this order; numbers in the measurand's unit:
//   pattern           single_reading, shift or scatter
//   unit              (only if the measurand has one)
//   value, reading_at the newest reading and its time (RFC 3339)
//   limit_lower, limit_upper   what that reading could have been, from the readings learned before it
//   mean_before, mean_after, shift   split at the estimated start; shift = after - before
//   sd                of the readings before the start
//   ratio_of_sd       sd after / before (only with two readings after)
//   readings_before, readings_since  split at the estimated start
//   score, limit, in_control_run_length, score_of   as of the signal; score_of: level or precision
// Once it has ceased: set_aside, the number of readings taken out as this alert ended.
#include <algorithm>
#include <cmath>

#include "core/base/rfc3339.hpp"
#include "core/chart/chart_state.hpp"

namespace agreed {

Subject Chart::State::subject() const {
  Subject subject;
  subject.analyzer = settings->of(chart().analyzer).id;
  subject.standard = settings->of(chart().standard).id;
  subject.measurand = measurand().id;
  return subject;
}

// A level score that found the change keeps its own words for the first readings; then the lasting
// explanation with the larger gain is told. Which rule ends the alert does not depend on it.
Change Chart::State::describe() const {
  const Explanation means = explain_by_two_means(stretch, best_level_split(stretch));
  const Explanation sds = has_precision_splits(stretch) ? explain_by_two_sds(stretch) : Explanation{};
  Change change;
  change.pattern = alarm->pattern;
  if (alarm->readings >= kPatternFrom) change.pattern = sds.gain > means.gain ? "scatter" : "shift";
  const Explanation& chosen = change.pattern == "scatter" && std::isfinite(sds.gain) ? sds : means;

  change.position = chosen.position;
  change.started_at = stretch.prefix(chosen.position + 1).at;
  change.started_between = {stretch.prefix(chosen.first + 1).at, stretch.prefix(chosen.last + 1).at};
  change.before = stretch.prefix(chosen.position).sums;
  change.after = stretch.last().sums - change.before;
  return change;
}

std::optional<double> Chart::State::score_of(EndingRule rule) const {
  return rule == EndingRule::level ? change_view().score : precision_view().score;
}

bool Chart::State::matters(const Change& change) const {
  if (change.pattern == "scatter") return true;
  double smallest = 0.5 * sd_of(change.before);
  if (measurand().allowable) smallest = measurand().allowable->at(mean_of(change.before)) / 4;
  return std::abs(change.shift()) >= chart().smallest_shift.value_or(smallest);
}

Details Chart::State::details(const Change& change) const {
  const PointRecord& newest_point = points.back();
  Details details;
  const auto number = [&](const char* name, double value) { details.emplace_back(name, value); };
  details.emplace_back("pattern", change.pattern);
  if (!measurand().unit.empty()) details.emplace_back("unit", measurand().unit);
  number("value", newest_point.value);
  details.emplace_back("reading_at", to_rfc3339(newest_point.at));
  if (const ChartPoint point = shown(newest_point); point.lower && point.upper) {
    number("limit_lower", *point.lower);
    number("limit_upper", *point.upper);
  }
  number("mean_before", mean_of(change.before));
  number("mean_after", mean_of(change.after));
  number("shift", change.shift());
  const double sd = sd_of(change.before);
  number("sd", sd);
  if (change.after.n >= 2 && sd > 0) number("ratio_of_sd", sd_of(change.after) / sd);
  number("readings_before", static_cast<double>(change.before.n));
  number("readings_since", static_cast<double>(change.after.n));
  const bool of_level = alarm->rule == EndingRule::level;
  if (alarm->score) number("score", *alarm->score);
  number("limit", of_level ? level.h : precision.h);
  number("in_control_run_length", of_level ? chart().level_run_length : chart().precision_run_length);
  details.emplace_back("score_of", std::string(of_level ? "level" : "precision"));
  return details;
}

Finding Chart::State::finding(const Change& change) const {
  Finding finding;
  finding.kind = AlertKind::check_standard_unstable;
  finding.subject = subject();
  finding.severity = matters(change) ? Severity::warning : Severity::notice;
  finding.at = points.back().at;
  finding.started_at = change.started_at;
  finding.started_between = change.started_between;
  finding.details = details(change);
  return finding;
}

Finding Chart::State::ceased(Instant at, const char* reason, std::int64_t set_aside_now) const {
  Finding finding;
  finding.kind = AlertKind::check_standard_unstable;
  finding.subject = subject();
  finding.holds = false;
  finding.at = at;
  finding.resolved_reason = reason;
  finding.details.emplace_back("set_aside", static_cast<double>(set_aside_now));
  return finding;
}

}  // namespace agreed
