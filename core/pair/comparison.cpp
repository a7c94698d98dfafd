#include "core/pair/comparison.hpp"

#include <cmath>
#include <utility>

#include "core/base/distributions.hpp"
#include "core/chart/run_length.hpp"
#include "core/pair/comparison_state.hpp"
#include "core/pair/curvature.hpp"
#include "core/pair/pair_weight.hpp"
#include "core/pair/scatter.hpp"

namespace agreed {
namespace {
constexpr std::size_t kRecentPairs = 500;
constexpr std::size_t kOlderPairs = 500;
constexpr std::size_t kBiasHistory = 500;
constexpr double kCurvedTail = 0.01;

double resolution_of(const Measurand& measurand) {
  return measurand.decimals ? std::pow(10.0, -*measurand.decimals) : 0.0;
}

DriftLimits limits_of(const ComparisonSettings& config) {
  const Score score = score_of(config);
  return {limit_for(score, config.warning_run_length).h,
          limit_for(score, critical_factor * config.warning_run_length).h};
}

Interval around(Bias bias, double t) {
  return {bias.value - t * bias.se, bias.value + t * bias.se};
}

void end(std::optional<Finding>& condition, Instant at, const char* reason, std::vector<Finding>& findings) {
  if (!condition) return;
  Finding ceased = std::move(*condition);
  condition.reset();
  ceased.holds = false;
  ceased.at = at;
  ceased.resolved_reason = reason;
  findings.push_back(std::move(ceased));
}
}  // namespace

Comparison::State::State(const Settings& all, ComparisonIndex comparison)
    : settings(&all),
      index(comparison),
      resolution(resolution_of(measurand())),
      window(config().window_pairs, config().window_age),
      chart(config().split_memory, resolution, config().relation),
      alarm(limits_of(config())),
      outliers(config().set_outliers_aside ? config().outlier_run_length : 0),
      verdict(measurand().decision_levels.size(), config().confirm, config().least_pairs),
      t_plain(kPlainTail),
      t_alert((1 - config().alert_confidence) / 2) {
  fit.reason = no_line::too_few_pairs;
  if (!no_verdict().empty()) verdict.block(no_verdict());
}

std::string_view Comparison::State::no_verdict() const {
  if (measurand().decision_levels.empty()) return verdict_reason::no_decision_levels;
  if (!measurand().allowable) return verdict_reason::no_allowable_difference;
  return {};
}

Deltas Comparison::State::deltas() const {
  return {delta_of_means(ratio.lambda, window), delta_of_means(ratio.low, window),
          delta_of_means(ratio.high, window)};
}

// Over restarts of the window as well: they mean another relation, not another repeatability.
ErrorRatio Comparison::State::ratio_of_replicates() const {
  ReplicatePool pool(config().error_growth);
  for (const RecentPair& kept : recent)
    if (kept.outcome == PairOutcome::accepted) pool.add(kept.pair);
  return pool.ratio();
}

void Comparison::State::add(const Pair& pair, std::vector<Finding>& findings) {
  const std::int64_t serial = ++pairs_total;
  if (!first_pair_at) first_pair_at = pair.at;
  recent.push_back({pair, serial});
  if (recent.size() > kRecentPairs) drop_oldest();

  bool hold = false;
  if (fit.exists() && ratio.known) {
    const int df = fit.degrees_of_freedom();
    const Point shares{1.0 / pair.x_replicates, 1.0 / pair.y_replicates};
    const double residual = prediction_residual(fit, {pair.x, pair.y}, shares, resolution);
    if (outliers.flags(residual, df)) {
      const auto admitted = outliers.admit_or_hold({pair, serial, residual, df});
      for (const HeldPair& held : admitted) accept(held.pair, held.serial, held.accepted_later);
      hold = admitted.empty();
      recent.back().residual = residual;
      recent.back().p = 2 * t_tail(std::abs(residual), df);
    }
  }
  if (hold)
    recent.back().outcome = PairOutcome::held;
  else
    accept(pair, serial, 0);
  set_aside(outliers.give_up(serial), pair.at, findings);
  if (!hold) evaluate(pair.at, findings);
}

void Comparison::State::drop_oldest() {
  older.push_back({std::move(recent.front().pair.sample), recent.front().pair.at});
  recent.pop_front();
  if (older.size() > kOlderPairs) older.pop_front();
}

void Comparison::State::begin_stretch(Instant at, std::vector<Finding>& findings) {
  set_aside(outliers.give_up_all(), at, findings);
  window.restart(0);
  chart.begin_stretch();
  stretch_from = at;
  fit = WindowFit();
  fit.reason = no_line::too_few_pairs;
  levels.clear();
  pairs_since_renewal = 0;
  scatter_excess = curved = false;
  verdict.begin_stretch(at);
  if (!no_verdict().empty()) verdict.block(no_verdict());
  alarm.end();
  end(drifting, at, "intervention", findings);
  end(unproven, at, "intervention", findings);
  end(scattered, at, "intervention", findings);
}

void Comparison::State::accept(const Pair& pair, std::int64_t serial, int later) {
  const Point point{pair.x, pair.y};
  window.insert(point, {pair.at, serial, 1.0 / pair.x_replicates, 1.0 / pair.y_replicates}, later);
  chart.insert(point, pair.at, later, weight_of(pair, ratio));
  ++pairs_since_renewal;
  outliers.accepted(serial);
  if (RecentPair* kept = recent_of(serial)) kept->outcome = PairOutcome::accepted;
}

void Comparison::State::set_aside(const std::vector<HeldPair>& pairs, Instant at,
                                  std::vector<Finding>& findings) {
  for (const HeldPair& held : pairs)
    if (RecentPair* kept = recent_of(held.serial)) {
      kept->outcome = PairOutcome::set_aside;
      findings.push_back(pair_outlier_finding(*this, *kept, at));
    }
}

RecentPair* Comparison::State::recent_of(std::int64_t serial) {
  const std::int64_t position = serial - recent.front().serial;
  return position >= 0 ? &recent[static_cast<std::size_t>(position)] : nullptr;
}

void Comparison::State::evaluate(Instant at, std::vector<Finding>& findings) {
  if (takes_replicates()) ratio = ratio_of_replicates();
  if (ratio.known) watch_for_change(at, findings);
  fit = fit_window(window, ratio, config().fit);
  test_renewed_window(at, findings);
  judge_levels(at);
  move_verdict(at, findings);
  watch_proof(at, findings);
}

void Comparison::State::watch_for_change(Instant at, std::vector<Finding>& findings) {
  const bool critical_already = alarm.open() == Severity::critical;
  const auto step = alarm.step(chart, deltas());
  if (step == DriftAlarm::Step::not_confirmed) end(drifting, at, "not_confirmed", findings);
  if (step != DriftAlarm::Step::warning && step != DriftAlarm::Step::critical) return;
  drifting = agreement_drifting_finding(*this, at);
  findings.push_back(*drifting);
  if (step != DriftAlarm::Step::critical) return;
  if (!critical_already) restarted = remember_start(*this);
  const int after = alarm.split().after;
  chart.restart(after);
  window.restart(after);
  pairs_since_renewal = window.size();
  stretch_from = alarm.split().started_at;
  if (no_verdict().empty()) verdict.restart_after_change(at);
}

// Tests that would call falsely if they were made at every pair: once per full renewal of the window.
void Comparison::State::test_renewed_window(Instant at, std::vector<Finding>& findings) {
  if (pairs_since_renewal < window.capacity() || !fit.exists()) return;
  pairs_since_renewal = 0;
  const auto p = curvature_p(window.points(), fit);
  curved = p && *p < kCurvedTail;
  if (config().scatter_run_length > 0) test_scatter(at, findings);
}

void Comparison::State::test_scatter(Instant at, std::vector<Finding>& findings) {
  const auto scatter = describe_scatter(fit, ratio, window.error_shares());
  scatter_excess = scatter && scatter->p < window.capacity() / config().scatter_run_length;
  if (!scatter_excess) {
    end(scattered, at, "scatter_explained", findings);
    return;
  }
  scattered = sample_scatter_finding(*this, *scatter, at);
  findings.push_back(*scattered);
}

void Comparison::State::judge_levels(Instant at) {
  levels.clear();
  if (!fit.exists()) return;
  const double t90 = t_plain.at(fit.degrees_of_freedom()), t_high = t_alert.at(fit.degrees_of_freedom());
  BiasPoint point{at, {}};
  for (const double level : measurand().decision_levels) {
    LevelNow now;
    now.level = level;
    now.bias = bias_at(fit.line, fit.jackknife, level);
    now.plain = around(now.bias, t90);
    now.alert = around(now.bias, t_high);
    now.statement.covered = fit.covers(level);
    if (measurand().allowable) {
      now.allowable = measurand().allowable->at(level);
      now.statement.plain = position_of(now.bias, t90, now.allowable);
      now.statement.alert = position_of(now.bias, t_high, now.allowable);
    }
    point.levels.push_back({now.bias.value, now.plain[0], now.plain[1]});
    levels.push_back(now);
  }
  if (point.levels.empty()) return;
  bias_history.push_back(std::move(point));
  if (bias_history.size() > kBiasHistory) bias_history.pop_front();
}

void Comparison::State::move_verdict(Instant at, std::vector<Finding>& findings) {
  VerdictInput input;
  input.at = at;
  input.pairs = window.size();
  input.blocked = !no_verdict().empty() ? no_verdict() : !ratio.known ? std::string_view(fit.reason) : "";
  input.no_fit = fit.reason;
  std::vector<LevelStatement> statements;
  for (const LevelNow& level : levels) statements.push_back(level.statement);
  input.levels = statements;
  const auto moved = verdict.step(input);
  if (verdict.verdict() == Verdict::agreement_shown) {
    last_agreement = at;
    agreement.shown({at, pairs_total}, moved == Verdict::agreement_shown);
  }
  if (moved == Verdict::disagreement_shown) {
    lost = agreement_lost_finding(*this, at);
    findings.push_back(*lost);
  } else if (moved == Verdict::agreement_shown) {
    end(lost, at, "agreement_shown", findings);
    if (alarm.open() == Severity::critical) {
      alarm.end();
      end(drifting, at, "agreement_shown", findings);
    }
  }
}

// Told when it has lasted too long, and again each time as long has gone by, since the number of pairs that
// would decide it changes.
void Comparison::State::watch_proof(Instant at, std::vector<Finding>& findings) {
  if (verdict.verdict() != Verdict::inconclusive) {
    end(unproven, at, to_string(verdict.verdict()), findings);
    return;
  }
  if (!config().prove_within || !verdict.since() || window.size() < config().least_pairs) return;
  const Instant since = unproven ? unproven->at : *verdict.since();
  if (!(at - since > *config().prove_within)) return;
  unproven = agreement_unproven_finding(*this, at);
  findings.push_back(*unproven);
}

Comparison::Comparison(const Settings& settings, ComparisonIndex index)
    : state_(std::make_unique<State>(settings, index)) {}
Comparison::~Comparison() = default;
Comparison::Comparison(Comparison&&) noexcept = default;
Comparison& Comparison::operator=(Comparison&&) noexcept = default;
Comparison::Comparison(const Comparison& other) : state_(std::make_unique<State>(*other.state_)) {}
Comparison& Comparison::operator=(const Comparison& other) {
  if (this != &other) state_ = std::make_unique<State>(*other.state_);
  return *this;
}

void Comparison::add(const Pair& pair, const ErrorRatio& ratio, std::vector<Finding>& findings) {
  state_->last_at = pair.at;
  if (!state_->takes_replicates()) state_->ratio = ratio;
  state_->add(pair, findings);
}

void Comparison::add(const Intervention& intervention, std::vector<Finding>& findings) {
  state_->last_at = intervention.at;
  if (intervention.restarts()) state_->begin_stretch(intervention.at, findings);
}

std::optional<Instant> Comparison::last_at() const {
  return state_->last_at;
}

void Comparison::conditions(std::vector<Finding>& findings) const {
  if (state_->lost) findings.push_back(*state_->lost);
  if (state_->drifting) findings.push_back(*state_->drifting);
  if (state_->unproven) findings.push_back(*state_->unproven);
  if (state_->scattered) findings.push_back(*state_->scattered);
}

std::vector<std::string> Comparison::set_aside() const {
  std::vector<std::string> samples;
  for (const RecentPair& recent : state_->recent)
    if (recent.outcome == PairOutcome::set_aside) samples.push_back(recent.pair.sample);
  return samples;
}

Instant Comparison::kept_since() const {
  return state_->recent.size() < kRecentPairs ? Instant::min() : state_->recent.front().pair.at;
}

Verdict Comparison::verdict() const {
  return state_->verdict.verdict();
}

ComparisonView Comparison::view() const {
  return show(*state_);
}

}  // namespace agreed
