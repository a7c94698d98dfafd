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
//   replicates        of the newest reading, if more than one: value is their mean
// mean_before and shift are left out where a new lot scatters more from its first reading on. Where precision
// is told by replicates, sd and ratio_of_sd of the pattern `scatter` are theirs, within runs.
// Once it has ceased: set_aside, the number of readings taken out as this alert ended.
//
// Details of check_standard_biased while it holds, numbers in the measurand's unit:
//   unit              (only if the measurand has one)
//   bias              mean - reference value
//   limit             bias that is allowed for
//   mean, sd, readings, readings_from   of this stretch (time as RFC 3339)
//   reference, expanded_uncertainty, coverage_factor
//   normalised_error
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
  // Replicates may tell of scatter before there are readings enough for two means.
  const Explanation means =
      has_level_splits(stretch) ? explain_by_two_means(stretch, best_level_split(stretch)) : Explanation{};
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
  const auto shift = change.shift();
  return !shift || std::abs(*shift) >= smallest_shift(change.before);
}

double Chart::State::smallest_shift(const Sums& before) const {
  if (chart().smallest_shift) return *chart().smallest_shift;
  return measurand().allowable ? measurand().allowable->at(mean_of(before)) / 4 : 0.5 * sd_of(before);
}

Chart::State::SdPair Chart::State::sds_of(const Change& change) const {
  if (change.pattern == "scatter" && stretch.by_replicates()) {
    const auto sd = [this](const Within& within) -> std::optional<double> {
      if (within.degrees < 1) return {};
      return std::sqrt(
          std::max(stretch.least_variance_within(), within.squares / static_cast<double>(within.degrees)));
    };
    return {sd(change.before.within + stretch.carried().within), sd(change.after.within)};
  }
  SdPair sds;
  if (degrees_of(change.before) >= 1) sds.before = sd_of(change.before);
  if (change.after.n >= 2)
    sds.after = std::sqrt(std::max(stretch.least_variance(),
                                   change.after.about_mean() / static_cast<double>(change.after.n - 1)));
  return sds;
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
  if (newest_point.replicates > 1) number("replicates", newest_point.replicates);
  if (change.before.n > 0) number("mean_before", mean_of(change.before));
  number("mean_after", mean_of(change.after));
  if (const auto shift = change.shift()) number("shift", *shift);
  const auto [sd, sd_after] = sds_of(change);
  if (sd) number("sd", *sd);
  if (sd && sd_after && *sd > 0) number("ratio_of_sd", *sd_after / *sd);
  number("readings_before", static_cast<double>(change.before.n));
  number("readings_since", static_cast<double>(change.after.n));
  const bool of_level = alarm->rule == EndingRule::level;
  if (alarm->score) number("score", *alarm->score);
  number("limit", alarm->limit);
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

Finding Chart::State::bias_finding() const {
  const ReferenceView reference = reference_view().value();
  const ComparedMean mean = compared_mean().value();
  Finding finding;
  finding.kind = AlertKind::check_standard_biased;
  finding.subject = subject();
  finding.severity = Severity::warning;
  finding.at = points.back().at;
  Details& details = finding.details;
  if (!measurand().unit.empty()) details.emplace_back("unit", measurand().unit);
  details.emplace_back("bias", *reference.bias);
  details.emplace_back("limit", *reference.allowed_bias);
  details.emplace_back("mean", mean.mean);
  details.emplace_back("sd", mean.sd);
  details.emplace_back("readings", static_cast<double>(mean.readings));
  details.emplace_back("readings_from", to_rfc3339(stretch.first_at()));
  details.emplace_back("reference", reference.value);
  details.emplace_back("expanded_uncertainty", *reference.expanded_uncertainty);
  details.emplace_back("coverage_factor", reference.coverage_factor);
  if (reference.normalised_error) details.emplace_back("normalised_error", *reference.normalised_error);
  return finding;
}

Finding Chart::State::ceased(AlertKind kind, Instant at, const char* reason) const {
  Finding finding;
  finding.kind = kind;
  finding.subject = subject();
  finding.holds = false;
  finding.at = at;
  finding.resolved_reason = reason;
  return finding;
}

Finding Chart::State::calmed(Instant at, const char* reason, std::int64_t set_aside_now) const {
  Finding finding = ceased(AlertKind::check_standard_unstable, at, reason);
  finding.details.emplace_back("set_aside", static_cast<double>(set_aside_now));
  return finding;
}

}  // namespace agreed
