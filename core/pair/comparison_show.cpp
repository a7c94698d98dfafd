#include <cmath>

#include "core/base/distributions.hpp"
#include "core/chart/run_length.hpp"
#include "core/pair/comparison_state.hpp"
#include "core/pair/concordance.hpp"
#include "core/pair/difference.hpp"
#include "core/pair/level_errors.hpp"
#include "core/pair/passing_bablok.hpp"
#include "core/pair/scatter.hpp"
#include "core/pair/second_opinion.hpp"

namespace agreed {
namespace {
using State = Comparison::State;

const char* name_of(ErrorSource source) {
  switch (source) {
    case ErrorSource::check_standards:
      return "check_standards";
    case ErrorSource::given_sds:
      return "given_sds";
    case ErrorSource::given_lambda:
      return "given_lambda";
    case ErrorSource::replicates:
      return "replicates";
  }
  return "";
}

const char* name_of(ErrorGrowth growth) {
  switch (growth) {
    case ErrorGrowth::constant:
      return "constant";
    case ErrorGrowth::proportional:
      return "proportional";
    case ErrorGrowth::mixed:
      return "mixed";
  }
  return "";
}

WindowView show_window(const State& state) {
  WindowView view;
  view.pairs = state.window.size();
  view.capacity = state.window.capacity();
  if (view.pairs > 0) {
    view.from = state.window.entries().front().at;
    view.to = state.window.entries().back().at;
  }
  view.since_intervention = state.stretch_from;
  return view;
}

ErrorModelSide show_side(const ErrorVariance& variance, const ErrorModel& model) {
  const bool constant = model.growth == ErrorGrowth::constant;
  ErrorModelSide side;
  side.constant = std::sqrt(constant ? variance.variance : model.at_zero);
  side.relative = std::sqrt(model.relative);
  if (variance.degrees_of_freedom > 0) side.df = variance.degrees_of_freedom;
  return side;
}

ErrorView show_error(const State& state) {
  const ErrorRatio& ratio = state.ratio;
  ErrorView view;
  view.source = name_of(state.config().error_ratio.source);
  view.model.growth = name_of(state.config().error_growth);
  if (!ratio.known) {
    view.reason = ratio.reason.empty() ? "no_pairs_yet" : ratio.reason;
    return view;
  }
  view.lambda = ratio.lambda;
  view.low = ratio.low;
  view.high = ratio.high;
  if (!ratio.variances_known) return view;
  view.sd_x = std::sqrt(ratio.x.variance);
  view.sd_y = std::sqrt(ratio.y.variance);
  if (ratio.x.degrees_of_freedom > 0) view.df_x = ratio.x.degrees_of_freedom;
  if (ratio.y.degrees_of_freedom > 0) view.df_y = ratio.y.degrees_of_freedom;
  if (ratio.growth() != ErrorGrowth::constant) view.model.level = ratio.level;
  view.model.x = show_side(ratio.x, ratio.x_model);
  view.model.y = show_side(ratio.y, ratio.y_model);
  return view;
}

std::optional<double> slope_at(const State& state, double lambda) {
  return slope_at_lambda(state.window, state.ratio, state.config().fit, lambda);
}

FitView show_fit(const State& state) {
  const WindowFit& fit = state.fit;
  const double mean_x = fit.line.mean_x;
  FitView view;
  view.method = to_string(fit.method);
  view.intercept = fit.line.intercept();
  view.slope = fit.line.slope;
  view.se_intercept = bias_at(fit.line, fit.jackknife, 0).se;
  view.se_slope = std::sqrt(fit.jackknife.slope);
  view.cov = fit.jackknife.intercept_slope(mean_x);
  view.analytic_se_intercept = bias_at(fit.line, fit.analytic, 0).se;
  view.analytic_se_slope = std::sqrt(fit.analytic.slope);
  view.confidence = state.config().confidence;
  const double t = t_quantile_of_tail((1 - view.confidence) / 2, fit.degrees_of_freedom());
  view.intercept_interval = {view.intercept - t * view.se_intercept, view.intercept + t * view.se_intercept};
  view.slope_interval = {view.slope - t * view.se_slope, view.slope + t * view.se_slope};
  view.identity_p = identity_p(fit.line, fit.jackknife, fit.moments.n);
  view.slope_at_lambda_low = slope_at(state, state.ratio.low);
  view.slope_at_lambda_high = slope_at(state, state.ratio.high);
  return view;
}

// Also says in `warnings` when the two lines part at a decision level.
std::optional<RobustView> show_robust(const State& state, std::vector<std::string>& warnings) {
  const double confidence = state.config().confidence;
  const std::span<const Point> points = state.window.points();
  const PassingBablok line = passing_bablok(points, confidence);
  if (!line.exists()) return std::nullopt;
  if (state.fit.exists()) {
    const double t = t_quantile_of_tail((1 - confidence) / 2, state.fit.degrees_of_freedom());
    if (methods_disagree(points, state.fit, line, state.measurand().decision_levels, t))
      warnings.emplace_back("methods_disagree");
  }
  return RobustView{line.slope, line.intercept, line.slope_interval, line.intercept_interval};
}

struct Said {
  Verdict verdict;
  std::string_view reason;
};

// The plain 90 % statement of a level, as far as there are enough pairs for one.
Said statement_of(const State& state, const LevelNow& level) {
  if (!state.measurand().allowable) return {Verdict::gathering, verdict_reason::no_allowable_difference};
  const bool enough = state.window.size() >= state.config().least_pairs;
  if (!enough && !state.verdict.restarted()) return {Verdict::gathering, verdict_reason::too_few_pairs};
  if (!level.statement.covered) return {Verdict::inconclusive, verdict_reason::not_covered};
  const Position position = level.statement.plain;
  if (!enough && (position == Position::inside || state.window.size() < VerdictMachine::least_after_change))
    return {Verdict::inconclusive, verdict_reason::restarted_after_change};
  if (position == Position::inside) return {Verdict::agreement_shown, {}};
  if (position == Position::across) return {Verdict::inconclusive, verdict_reason::not_decided};
  return {Verdict::disagreement_shown, {}};
}

LevelView show_level(const State& state, const LevelNow& level) {
  LevelView view;
  view.level = level.level;
  view.bias = level.bias.value;
  view.se = level.bias.se;
  view.low = level.plain[0];
  view.high = level.plain[1];
  const Said said = statement_of(state, level);
  view.verdict = said.verdict;
  view.reason = said.reason;
  if (!state.measurand().allowable) return view;
  view.allowable = level.allowable;
  const SingleResult single = single_result(level.bias.value, state.fit.residual_variance_at(level.level),
                                            state.fit.degrees_of_freedom(), level.allowable);
  view.single_result = SingleResultView{single.share_within, single.low, single.high};
  return view;
}

std::vector<LevelView> show_levels(const State& state) {
  std::vector<LevelView> views;
  for (const LevelNow& level : state.levels) views.push_back(show_level(state, level));
  if (!views.empty()) return views;
  for (const double level : state.measurand().decision_levels) {
    LevelView view;
    view.level = level;
    if (state.measurand().allowable) view.allowable = state.measurand().allowable->at(level);
    view.reason = state.fit.reason;
    views.push_back(view);
  }
  return views;
}

// Also says in `warnings` when the score at lambda alone would have been a signal.
PairChartView show_pair_chart(const State& state, std::vector<std::string>& warnings) {
  const ComparisonSettings& config = state.config();
  const DriftLimits& limits = state.alarm.limits();
  PairChartView view;
  view.pairs = state.chart.pairs();
  view.limit = limits.warning;
  view.critical_limit = limits.critical;
  view.in_control_run_length = config.warning_run_length;
  view.extrapolated = limit_for(score_of(config), critical_factor * config.warning_run_length).extrapolated;
  view.against_established_line = state.chart.against_established_line();
  view.severity = state.alarm.open();
  std::optional<double> evidence;
  if (state.ratio.known && view.pairs > 0) {
    const Deltas deltas = state.deltas();
    evidence = DriftAlarm::evidence(state.chart, deltas);
    if (evidence) {
      view.score = score_of_evidence(*evidence);
      const double at_lambda = score_of_evidence(state.chart.evidence(deltas[0]).value_or(0));
      if (at_lambda > limits.warning && !(*view.score > limits.warning))
        warnings.push_back("lambda_uncertain");
    }
  }
  if (view.severity) {
    view.state = PairChartState::unstable;
    Split split = state.alarm.split();
    // After a critical signal the pairs before the start are gone from the chart; a warning's start may move.
    if (view.severity == Severity::warning && evidence)
      split = state.chart.best_split(state.deltas()[0]).value_or(split);
    view.started_at = split.started_at;
    view.started_between = split.started_between;
  } else if (view.score) {
    view.state = PairChartState::stable;
  }
  return view;
}

std::optional<ProofView> show_proof(const State& state) {
  if (state.verdict.verdict() != Verdict::inconclusive || state.window.size() < state.config().least_pairs)
    return std::nullopt;
  const auto plan = proof_plan_of(state);
  if (!plan) return std::nullopt;
  ProofView view;
  view.overdue = state.unproven.has_value();
  view.level = plan->level;
  view.aim = plan->aim;
  view.more_pairs = plan->more_pairs;
  view.residual_sd = std::sqrt(state.fit.residual_variance);
  if (plan->scatter_factor) view.sd_needed = *plan->scatter_factor * view.residual_sd;
  view.reason = plan->reason;
  return view;
}

PairView show_pair(const State& state, const RecentPair& recent, std::int64_t first_in_window) {
  PairView view;
  view.sample = recent.pair.sample;
  view.measured_at = recent.pair.at;
  view.x = recent.pair.x;
  view.y = recent.pair.y;
  view.x_replicates = recent.pair.x_replicates;
  view.y_replicates = recent.pair.y_replicates;
  view.in_window = recent.outcome == PairOutcome::accepted && recent.serial >= first_in_window;
  view.outlier = recent.outcome == PairOutcome::set_aside;
  if (state.fit.exists()) {
    const Point point{view.x, view.y}, shares{1.0 / view.x_replicates, 1.0 / view.y_replicates};
    view.residual = view.in_window ? studentised_residual(state.fit, point, shares, state.resolution)
                                   : prediction_residual(state.fit, point, shares, state.resolution);
  }
  return view;
}

void show_pairs(const State& state, ComparisonView& view) {
  const std::int64_t first_in_window =
      state.window.size() > 0 ? state.window.entries().front().serial : state.pairs_total + 1;
  view.pairs.reserve(state.recent.size());
  for (const RecentPair& recent : state.recent) {
    view.pairs.push_back(show_pair(state, recent, first_in_window));
    if (recent.outcome == PairOutcome::set_aside)
      view.outliers.push_back({recent.pair.sample, recent.pair.at, recent.residual, recent.p});
  }
}
}  // namespace

ComparisonView show(const State& state) {
  ComparisonView view;
  view.index = state.index;
  view.verdict = state.verdict.verdict();
  view.verdict_since = state.verdict.since();
  view.verdict_reason = state.verdict.reason();
  view.last_agreement = state.last_agreement;
  if (state.lost) view.agreement_lost = state.lost->at;
  view.proof = show_proof(state);
  view.pairs_total = state.pairs_total;
  view.window = show_window(state);
  view.error = show_error(state);
  view.levels = show_levels(state);
  view.difference = describe_differences(state.window.points(), state.measurand().allowable);
  view.robust = show_robust(state, view.warnings);
  view.concordance = concordance(state.window.moments());
  if (state.fit.exists()) {
    view.fit = show_fit(state);
    const Point shares = state.window.error_shares();
    if (state.config().error_growth == ErrorGrowth::constant &&
        error_grows_with_level(state.window.points(), state.fit))
      view.warnings.push_back("error_grows_with_level");
    if (state.curved) view.warnings.push_back("curved");
    view.scatter = describe_scatter(state.fit, state.ratio, shares);
    if (view.scatter) view.scatter->excess = state.scatter_excess;
    view.range = describe_range(state.fit, state.ratio, shares, state.measurand().decision_levels);
  } else {
    view.fit_reason = state.fit.reason;
  }
  view.pair_chart = show_pair_chart(state, view.warnings);
  view.bias_history.assign(state.bias_history.begin(), state.bias_history.end());
  show_pairs(state, view);
  return view;
}

}  // namespace agreed
