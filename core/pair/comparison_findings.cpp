#include <cmath>

#include "core/base/rfc3339.hpp"
#include "core/pair/comparison_state.hpp"

namespace agreed {
namespace {
Finding finding_of(const Comparison::State& state, AlertKind kind, Severity severity, Instant at) {
  Finding finding;
  finding.kind = kind;
  finding.subject.comparison = state.config().id;
  finding.severity = severity;
  finding.at = at;
  finding.details = {{"measurand", state.measurand().id},
                     {"unit", state.measurand().unit},
                     {"x", state.settings->of(state.config().x).id},
                     {"y", state.settings->of(state.config().y).id}};
  return finding;
}

void add_start(const Comparison::State& state, Finding& finding) {
  if (!state.alarm.open()) return;
  finding.started_at = state.alarm.split().started_at;
  finding.started_between = state.alarm.split().started_between;
}

// The confirmed level that lies furthest beyond what is allowable.
const LevelNow& worst_level(const Comparison::State& state) {
  const LevelNow* worst = nullptr;
  double furthest = 0;
  for (std::size_t i = 0; i < state.levels.size(); ++i) {
    if (state.verdict.confirmed(i) == Position::across) continue;
    const LevelNow& level = state.levels[i];
    const double beyond = std::abs(level.bias.value) - level.allowable;
    if (worst == nullptr || beyond > furthest) {
      worst = &level;
      furthest = beyond;
    }
  }
  return worst == nullptr ? state.levels.front() : *worst;
}

void append(Finding& finding, const Details& details) {
  finding.details.insert(finding.details.end(), details.begin(), details.end());
}
}  // namespace

std::optional<ProofPlan> proof_plan_of(const Comparison::State& state) {
  if (state.levels.empty() || !state.measurand().allowable) return std::nullopt;
  std::vector<LevelEvidence> levels;
  for (const LevelNow& now : state.levels)
    levels.push_back({now.level, now.bias.value, now.bias.se, now.allowable, now.statement.covered});
  return plan_proof(levels, state.window.size(), state.config().alert_confidence);
}

Finding agreement_lost_finding(const Comparison::State& state, Instant at) {
  Finding finding = finding_of(state, AlertKind::agreement_lost, Severity::critical, at);
  add_start(state, finding);
  const LevelNow& level = worst_level(state);
  const Details details = {{"level", level.level},
                           {"bias", level.bias.value},
                           {"low", level.alert[0]},
                           {"high", level.alert[1]},
                           {"confidence", state.config().alert_confidence},
                           {"allowable", level.allowable},
                           {"slope", state.fit.line.slope},
                           {"intercept", state.fit.line.intercept()},
                           {"pairs", static_cast<double>(state.window.size())}};
  finding.details.insert(finding.details.end(), details.begin(), details.end());
  if (state.fit.weighted()) finding.details.emplace_back("fit", std::string(to_string(state.fit.method)));
  return finding;
}

Finding agreement_drifting_finding(const Comparison::State& state, Instant at) {
  const Severity severity = state.alarm.open().value_or(Severity::warning);
  Finding finding = finding_of(state, AlertKind::agreement_drifting, severity, at);
  add_start(state, finding);
  const Split& split = state.alarm.split();
  const DriftLimits& limits = state.alarm.limits();
  const auto evidence = DriftAlarm::evidence(state.chart, state.deltas());
  const Details details = {{"score", score_of_evidence(evidence.value_or(0))},
                           {"limit", severity == Severity::critical ? limits.critical : limits.warning},
                           {"critical_limit", limits.critical},
                           {"shift", split.shift},
                           {"pairs_before", static_cast<double>(split.before)},
                           {"pairs_after", static_cast<double>(split.after)}};
  append(finding, details);
  if (state.chart.against_established_line())
    append(finding, {{"relation_intercept", state.config().relation->intercept},
                     {"relation_slope", state.config().relation->slope}});
  return finding;
}

Finding agreement_unproven_finding(const Comparison::State& state, Instant at) {
  Finding finding = finding_of(state, AlertKind::agreement_unproven, Severity::notice, at);
  append(finding, {{"inconclusive_since", to_rfc3339(state.verdict.since().value_or(at))},
                   {"pairs", static_cast<double>(state.window.size())},
                   {"window_pairs", static_cast<double>(state.window.capacity())}});
  const auto plan = proof_plan_of(state);
  if (!plan) return finding;
  const double sd = std::sqrt(state.fit.residual_variance);
  append(finding, {{"residual_sd", sd},
                   {"level", plan->level},
                   {"bias", plan->bias},
                   {"allowable", plan->allowable},
                   {"aim", to_string(plan->aim)}});
  if (!plan->reason.empty()) append(finding, {{"reason", std::string(plan->reason)}});
  if (plan->more_pairs) append(finding, {{"pairs_needed", static_cast<double>(*plan->more_pairs)}});
  if (plan->scatter_factor) append(finding, {{"sd_needed", *plan->scatter_factor * sd}});
  return finding;
}

Finding sample_scatter_finding(const Comparison::State& state, const ScatterView& scatter, Instant at) {
  Finding finding = finding_of(state, AlertKind::sample_scatter, Severity::notice, at);
  append(finding, {{"observed_sd", scatter.observed_sd},
                   {"expected_sd", scatter.expected_sd},
                   {"sd_ratio", std::sqrt(scatter.variance_ratio)},
                   {"variance_ratio", scatter.variance_ratio},
                   {"p", scatter.p},
                   {"pairs", static_cast<double>(state.window.size())},
                   {"from", to_rfc3339(state.window.entries().front().at)},
                   {"to", to_rfc3339(state.window.entries().back().at)}});
  return finding;
}

Finding pair_outlier_finding(const Comparison::State& state, const RecentPair& recent, Instant at) {
  Finding finding = finding_of(state, AlertKind::pair_outlier, Severity::notice, at);
  const Details details = {{"sample", recent.pair.sample}, {"x_value", recent.pair.x},
                           {"y_value", recent.pair.y},     {"measured_at", to_rfc3339(recent.pair.at)},
                           {"residual", recent.residual},  {"p", recent.p}};
  finding.details.insert(finding.details.end(), details.begin(), details.end());
  return finding;
}

}  // namespace agreed
