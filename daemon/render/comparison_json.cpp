#include "daemon/render/comparison_json.hpp"

#include "daemon/render/json_parts.hpp"

namespace agreed {
namespace {

Json interval_of(const Interval& interval) {
  return Json::array({json_number(interval[0]), json_number(interval[1])});
}

Json window_of(const WindowView& window) {
  return {{"pairs", window.pairs},
          {"capacity", window.capacity},
          {"from", json_time(window.from)},
          {"to", json_time(window.to)},
          {"since_intervention", json_time(window.since_intervention)}};
}

Json side_of(const std::optional<ErrorModelSide>& side) {
  if (!side) return nullptr;
  return {{"constant", json_number(side->constant)},
          {"relative", json_number(side->relative)},
          {"df", json_number(side->df)}};
}

Json model_of(const ErrorModelView& model) {
  return {{"growth", model.growth},
          {"level", json_number(model.level)},
          {"x", side_of(model.x)},
          {"y", side_of(model.y)}};
}

Json error_of(const ErrorView& error) {
  return {{"lambda", json_number(error.lambda)}, {"lambda_is", "var(x error)/var(y error)"},
          {"low", json_number(error.low)},       {"high", json_number(error.high)},
          {"sd_x", json_number(error.sd_x)},     {"sd_y", json_number(error.sd_y)},
          {"df_x", json_number(error.df_x)},     {"df_y", json_number(error.df_y)},
          {"source", json_words(error.source)},  {"reason", json_words(error.reason)},
          {"model", model_of(error.model)}};
}

Json fit_of(const std::optional<FitView>& fit) {
  if (!fit) return nullptr;
  return {{"method", fit->method},
          {"intercept", json_number(fit->intercept)},
          {"slope", json_number(fit->slope)},
          {"se_intercept", json_number(fit->se_intercept)},
          {"se_slope", json_number(fit->se_slope)},
          {"cov", json_number(fit->cov)},
          {"se_method", fit->se_method},
          {"analytic_se_intercept", json_number(fit->analytic_se_intercept)},
          {"analytic_se_slope", json_number(fit->analytic_se_slope)},
          {"intercept_interval", interval_of(fit->intercept_interval)},
          {"slope_interval", interval_of(fit->slope_interval)},
          {"confidence", json_number(fit->confidence)},
          {"identity_p", json_number(fit->identity_p)},
          {"slope_at_lambda_low", json_number(fit->slope_at_lambda_low)},
          {"slope_at_lambda_high", json_number(fit->slope_at_lambda_high)}};
}

Json single_result_of(const std::optional<SingleResultView>& single) {
  if (!single) return nullptr;
  return {{"share_within", json_number(single->share_within)},
          {"low", json_number(single->low)},
          {"high", json_number(single->high)}};
}

Json levels_of(const ComparisonView& view) {
  Json list = Json::array();
  for (const LevelView& level : view.levels)
    list.push_back({{"level", json_number(level.level)},
                    {"bias", json_number(level.bias)},
                    {"se", json_number(level.se)},
                    {"low", json_number(level.low)},
                    {"high", json_number(level.high)},
                    {"allowable", json_number(level.allowable)},
                    {"verdict", to_string(level.verdict)},
                    {"reason", json_words(level.reason)},
                    {"single_result", single_result_of(level.single_result)}});
  return list;
}

Json within_of(const DifferenceView& difference) {
  if (!difference.within_count || !difference.within_of) return nullptr;
  return {
      {"count", *difference.within_count},
      {"of", *difference.within_of},
      {"interval", difference.within_interval ? interval_of(*difference.within_interval) : Json(nullptr)}};
}

Json limits_of(const AgreementLimits& limits) {
  return {{"mean", json_number(limits.mean)},
          {"sd", json_number(limits.sd)},
          {"mean_interval", interval_of(limits.mean_interval)},
          {"lower_limit", json_number(limits.lower_limit)},
          {"upper_limit", json_number(limits.upper_limit)},
          {"lower_limit_interval", interval_of(limits.lower_limit_interval)},
          {"upper_limit_interval", interval_of(limits.upper_limit_interval)}};
}

Json difference_of(const std::optional<DifferenceView>& difference) {
  if (!difference) return nullptr;
  Json json = limits_of(*difference);
  json["within_allowable"] = within_of(*difference);
  json["percent"] = difference->percent ? limits_of(*difference->percent) : Json(nullptr);
  json["paired_t_p"] = json_number(difference->paired_t_p);
  return json;
}

Json robust_of(const std::optional<RobustView>& robust) {
  if (!robust) return nullptr;
  const auto interval = [](const std::optional<Interval>& limits) {
    return limits ? interval_of(*limits) : Json(nullptr);
  };
  return {{"method", "passing_bablok"},
          {"slope", json_number(robust->slope)},
          {"slope_interval", interval(robust->slope_interval)},
          {"intercept", json_number(robust->intercept)},
          {"intercept_interval", interval(robust->intercept_interval)}};
}

Json scatter_of(const std::optional<ScatterView>& scatter) {
  if (!scatter) return nullptr;
  return {{"observed_sd", json_number(scatter->observed_sd)},
          {"expected_sd", json_number(scatter->expected_sd)},
          {"variance_ratio", json_number(scatter->variance_ratio)},
          {"p", json_number(scatter->p)},
          {"excess", scatter->excess}};
}

Json range_of(const std::optional<RangeView>& range) {
  if (!range) return nullptr;
  return {{"reliability_ratio", json_number(range->reliability_ratio)},
          {"adequate", range->adequate},
          {"covers_levels", range->covers_levels}};
}

Json pair_chart_of(const PairChartView& chart) {
  return {{"state", to_string(chart.state)},
          {"pairs", chart.pairs},
          {"score", json_number(chart.score)},
          {"limit", json_number(chart.limit)},
          {"critical_limit", json_number(chart.critical_limit)},
          {"in_control_run_length", json_number(chart.in_control_run_length)},
          {"limit_extrapolated", chart.extrapolated},
          {"against", chart.against_established_line ? "established_line" : "own_line"},
          {"severity", chart.severity ? Json(to_string(*chart.severity)) : Json(nullptr)},
          {"started_at", json_time(chart.started_at)},
          {"started_between", json_period(chart.started_between)},
          {"reason", chart.score ? Json(nullptr) : Json("the pair chart needs 7 pairs in this stretch")}};
}

Json diagnosis_of(const std::optional<DiagnosisView>& diagnosis) {
  if (!diagnosis) return nullptr;
  const auto& [x, y, both, neither] = diagnosis->probabilities;
  return {{"moved", to_string(diagnosis->moved)},
          {"evidence", diagnosis->evidence},
          {"probability", json_number(diagnosis->probability)},
          {"probabilities",
           {{"x", json_number(x)},
            {"y", json_number(y)},
            {"both", json_number(both)},
            {"neither", json_number(neither)}}},
          {"shift_pairs", json_number(diagnosis->shift_pairs)},
          {"shift_x", json_number(diagnosis->shift_x)},
          {"shift_y", json_number(diagnosis->shift_y)},
          {"se_shift_pairs", json_number(diagnosis->se_pairs)},
          {"se_shift_x", json_number(diagnosis->se_x)},
          {"se_shift_y", json_number(diagnosis->se_y)},
          {"pairs_before", diagnosis->pairs_before},
          {"pairs_after", diagnosis->pairs_after},
          {"x_readings_before", diagnosis->x_readings_before},
          {"x_readings_after", diagnosis->x_readings_after},
          {"y_readings_before", diagnosis->y_readings_before},
          {"y_readings_after", diagnosis->y_readings_after},
          {"started_at", json_time(diagnosis->started_at)},
          {"started_between", json_period(diagnosis->started_between)}};
}

Json look_back_of(const std::optional<LookBackView>& look_back) {
  if (!look_back) return nullptr;
  return {{"from", to_rfc3339(look_back->from)}, {"from_is", look_back->from_is()},
          {"to", to_rfc3339(look_back->to)},     {"hours", json_number(look_back->hours)},
          {"pairs", look_back->pairs},           {"samples", look_back->samples}};
}

Json proof_of(const std::optional<ProofView>& proof) {
  if (!proof) return nullptr;
  return {{"overdue", proof->overdue},
          {"level", json_number(proof->level)},
          {"aim", to_string(proof->aim)},
          {"more_pairs", proof->more_pairs ? Json(*proof->more_pairs) : Json(nullptr)},
          {"residual_sd", json_number(proof->residual_sd)},
          {"sd_needed", json_number(proof->sd_needed)},
          {"reason", json_words(proof->reason)}};
}

/// The established line that the configuration names, null when there is none.
Json relation_of(const std::optional<EstablishedLine>& relation) {
  if (!relation) return nullptr;
  return {{"intercept", json_number(relation->intercept)}, {"slope", json_number(relation->slope)}};
}

Json outliers_of(const ComparisonView& view) {
  Json list = Json::array();
  for (const OutlierView& outlier : view.outliers)
    list.push_back({{"sample", outlier.sample},
                    {"measured_at", to_rfc3339(outlier.measured_at)},
                    {"residual", json_number(outlier.residual)},
                    {"p", json_number(outlier.p)}});
  return list;
}

Json pairs_of(const ComparisonView& view, int pairs) {
  const std::size_t wanted = std::min(view.pairs.size(), static_cast<std::size_t>(pairs));
  Json list = Json::array();
  for (std::size_t i = view.pairs.size() - wanted; i < view.pairs.size(); ++i) {
    const PairView& pair = view.pairs[i];
    list.push_back({{"sample", pair.sample},
                    {"measured_at", to_rfc3339(pair.measured_at)},
                    {"x", json_number(pair.x)},
                    {"y", json_number(pair.y)},
                    {"x_replicates", pair.x_replicates},
                    {"y_replicates", pair.y_replicates},
                    {"residual", json_number(pair.residual)},
                    {"in_window", pair.in_window},
                    {"outlier", pair.outlier}});
  }
  return list;
}

/// A comparison that the engine has not shown yet is shown as it begins.
ComparisonView view_of(const Snapshot& snapshot, ComparisonIndex index) {
  if (index.value < snapshot.comparisons.size() && snapshot.comparisons[index.value])
    return *snapshot.comparisons[index.value];
  ComparisonView view;
  view.window.capacity = snapshot.settings->of(index).window_pairs;
  view.fit_reason = "no pair has come yet";
  view.error.reason = "no check reading has come yet";
  return view;
}

Json comparison_of(const Snapshot& snapshot, ComparisonIndex index, int pairs) {
  const Settings& settings = *snapshot.settings;
  const ComparisonSettings& comparison = settings.of(index);
  const ComparisonView view = view_of(snapshot, index);
  return {{"id", comparison.id},
          {"title", comparison.title},
          {"measurand", settings.of(comparison.measurand).id},
          {"unit", settings.of(comparison.measurand).unit},
          {"x", settings.of(comparison.x).id},
          {"y", settings.of(comparison.y).id},
          {"verdict", to_string(view.verdict)},
          {"verdict_since", json_time(view.verdict_since)},
          {"verdict_reason", json_words(view.verdict_reason)},
          {"last_agreement_at", json_time(view.last_agreement)},
          {"agreement_lost_at", json_time(view.agreement_lost)},
          {"proof", proof_of(view.proof)},
          {"relation", relation_of(comparison.relation)},
          {"warnings", view.warnings},
          {"pairs_total", view.pairs_total},
          {"waiting", view.waiting},
          {"window", window_of(view.window)},
          {"error", error_of(view.error)},
          {"fit", fit_of(view.fit)},
          {"fit_reason", json_words(view.fit_reason)},
          {"levels", levels_of(view)},
          {"difference", difference_of(view.difference)},
          {"robust", robust_of(view.robust)},
          {"concordance", json_number(view.concordance)},
          {"scatter", scatter_of(view.scatter)},
          {"range", range_of(view.range)},
          {"pair_chart", pair_chart_of(view.pair_chart)},
          {"diagnosis", diagnosis_of(view.diagnosis)},
          {"look_back", look_back_of(view.look_back)},
          {"outliers", outliers_of(view)},
          {"pairs", pairs_of(view, pairs)}};
}

}  // namespace

std::string comparison_json(const Snapshot& snapshot, ComparisonIndex index, int pairs) {
  return json_text(comparison_of(snapshot, index, pairs));
}

std::string comparisons_json(const Snapshot& snapshot, int pairs) {
  Json list = Json::array();
  for (std::uint32_t i = 0; i < snapshot.settings->comparisons.size(); ++i)
    list.push_back(comparison_of(snapshot, ComparisonIndex{i}, pairs));
  return json_text({{"comparisons", std::move(list)}});
}

}  // namespace agreed
