#include "daemon/plan/plan_json.hpp"

#include <algorithm>

#include <nlohmann/json.hpp>

#include "config/value_text.hpp"

namespace agreed::plan {
namespace {

using Json = nlohmann::ordered_json;

template <class Value>
Json or_null(const std::optional<Value>& value) {
  return value ? Json(*value) : Json(nullptr);
}

double hours(Duration time) {
  return std::chrono::duration<double, std::ratio<3600>>(time).count();
}

/// NAME and NAME_error; null where there is none.
void put(Json& json, const std::string& name, const std::optional<Simulated>& figure) {
  json[name] = figure ? Json(figure->value) : Json(nullptr);
  json[name + "_error"] = figure ? Json(figure->standard_error) : Json(nullptr);
}

std::optional<Simulated> times(const std::optional<Simulated>& figure, double factor) {
  if (!figure) return std::nullopt;
  return Simulated{figure->value * factor, figure->standard_error * factor};
}

/// `what`: readings or pairs.
Json step_json(const StepWaits& step, const std::string& what, Duration every) {
  Json json{
      {"in_sd", step.in_sds}, {"size", or_null(step.size)}, {"is_allowable_difference", step.allowable}};
  put(json, what + "_half", step.half);
  put(json, "hours_half", times(step.half, hours(every)));
  put(json, what + "_nine_in_ten", step.nine_in_ten);
  put(json, "hours_nine_in_ten", times(step.nine_in_ten, hours(every)));
  json[what + "_followed"] = step.horizon;
  return json;
}

Json sd_json(const ExpectedSd& sd) {
  const bool known = sd.source != Source::unknown, seen = sd.source == Source::seen;
  return {{"sd", known ? Json(sd.value) : Json(nullptr)},
          {"source", to_string(sd.source)},
          {"degrees_of_freedom", seen ? Json(sd.degrees_of_freedom) : Json(nullptr)}};
}

void put_score(Json& json, const std::string& name, const std::optional<ScoreFalseAlerts>& score) {
  if (!score) return;
  json[name + "_run_length"] = score->run_length;
  put(json, name + "_per_year", score->per_year);
  json[name + "_extrapolated"] = score->extrapolated;
}

Json chart_json(const Plan& plan, const Settings& settings, ChartIndex index) {
  const ChartSettings& chart = settings.of(index);
  const SeenChart& seen = plan.seen.charts[index.value];
  const ChartFalseAlerts& calls = plan.false_alerts.charts.at(index.value);
  Json alerts;
  put(alerts, "per_year", calls.per_year);
  put_score(alerts, "level", calls.level);
  put_score(alerts, "precision", calls.precision);
  put_score(alerts, "limits", calls.limits);
  Json steps = Json::array();
  for (const StepWaits& step : steps_of(plan, index))
    steps.push_back(step_json(step, "readings", chart.every));
  return {{"analyzer", settings.of(chart.analyzer).id},
          {"standard", settings.of(chart.standard).id},
          {"measurand", settings.of(chart.measurand).id},
          {"unit", settings.of(chart.measurand).unit},
          {"every", settings_file::shown(chart.every)},
          {"every_hours", hours(chart.every)},
          {"repeatability", sd_json(plan.charts[index.value].sd)},
          {"readings_seen", seen.readings},
          {"mean_seen", or_null(seen.mean)},
          {"warnings", seen.warnings},
          {"false_alerts", std::move(alerts)},
          {"steps", std::move(steps)}};
}

Json proof_json(const ProofPlanned& proof, Duration every) {
  const ProofNeeds& needs = proof.needs;
  Json json{{"bias", proof.bias},
            {"bias_is_seen", proof.bias_seen},
            {"power_wished", kProofPower},
            {"pairs", or_null(needs.pairs)},
            {"hours", needs.pairs ? Json(*needs.pairs * hours(every)) : Json(nullptr)}};
  put(json, "power", needs.power);
  json["power_of_one_look"] = std::min(1.0, needs.closed_form);  // a rounding error above it
  json["window_holds"] = needs.capacity;
  json["reason"] = std::string(needs.reason);
  json["level"] = or_null(needs.level);
  json["pairs_in_larger_window"] = or_null(needs.pairs_in_larger_window);
  json["sd_factor"] = or_null(needs.sd_factor);
  json["allowable_factor"] = or_null(needs.allowable_factor);
  return json;
}

Json comparison_steps(const ComparisonPlan& planned, Duration every) {
  Json steps = Json::array();
  for (const StepWaits& step : planned.steps) {
    Json json = step_json(step, "pairs", every);
    put(json, "pairs_half_agreement_drifting", step.half_drifting);
    put(json, "pairs_half_agreement_lost", step.half_lost);
    steps.push_back(std::move(json));
  }
  return steps;
}

Json comparison_json(const Plan& plan, const Settings& settings, ComparisonIndex index) {
  const ComparisonSettings& comparison = settings.of(index);
  const ComparisonPlan& planned = plan.comparisons[index.value];
  const SeenComparison& seen = plan.seen.comparisons[index.value];
  const ComparisonFalseAlerts& calls = plan.false_alerts.comparisons.at(index.value);
  Json alerts;
  put(alerts, "per_year", calls.per_year);
  put_score(alerts, "warning", calls.warning);
  put_score(alerts, "critical", calls.critical);
  put_score(alerts, "outlier", calls.outlier);
  put_score(alerts, "scatter", calls.scatter);
  Json proofs = Json::array();
  for (const ProofPlanned& proof : planned.proofs) proofs.push_back(proof_json(proof, comparison.every));
  Json biases = Json::array();
  for (const SeenBias& one : seen.biases)
    biases.push_back({{"level", one.level}, {"bias", one.bias}, {"low", one.low}, {"high", one.high}});
  const auto& conditions = planned.pairs.conditions;
  return {{"id", comparison.id},
          {"measurand", settings.of(comparison.measurand).id},
          {"unit", settings.of(comparison.measurand).unit},
          {"x", settings.of(comparison.x).id},
          {"y", settings.of(comparison.y).id},
          {"every", settings_file::shown(comparison.every)},
          {"every_hours", hours(comparison.every)},
          {"repeatability_x", sd_json(planned.pairs.x)},
          {"repeatability_y", sd_json(planned.pairs.y)},
          {"scaled_to_scatter_seen", planned.pairs.scatter_seen},
          {"sd_of_pair", or_null(planned.sd_of_pair)},
          {"lambda", conditions ? Json(conditions->ratio.lambda) : Json(nullptr)},
          {"pairs_seen", seen.pairs},
          {"samples", !conditions                  ? "unknown"
                      : planned.pairs.samples_seen ? "seen"
                                                   : "assumed"},
          {"samples_mean", conditions ? Json(conditions->samples.mean()) : Json(nullptr)},
          {"samples_sd", conditions ? Json(conditions->samples.sd()) : Json(nullptr)},
          {"biases_seen", std::move(biases)},
          {"warnings", seen.warnings},
          {"false_alerts", std::move(alerts)},
          {"steps", comparison_steps(planned, comparison.every)},
          {"proofs", std::move(proofs)},
          {"no_proof", planned.no_proof}};
}

Json advice_json(const std::vector<Advice>& advice) {
  Json all = Json::array();
  for (const Advice& one : advice) {
    Json changes = Json::array();
    for (const SettingChange& change : one.changes)
      changes.push_back({{"key", change.key},
                         {"value", change.value},
                         {"now", change.now.empty() ? Json(nullptr) : Json(change.now)}});
    Json json{{"kind", one.kind}, {"changes", std::move(changes)}, {"sd_factor", or_null(one.sd_factor)}};
    put(json, "share_in_time", one.share);
    json["false_alerts_per_year"] = one.false_alerts_per_year;
    json["run_length_below_1000"] = one.many_false_alerts;
    all.push_back(std::move(json));
  }
  return all;
}

Json budget_answer_json(const BudgetAnswer& answer, const Settings& settings) {
  Json fixed = Json::array();
  for (const FixedRate& rate : answer.budget.fixed)
    fixed.push_back({{"name", name_of(settings, {rate.chart, rate.comparison})},
                     {"classical", rate.classical},
                     {"per_year", rate.per_year}});
  return {{"wished", answer.wished},   {"expected", answer.expected},
          {"met", answer.met},         {"fixed_per_year", answer.budget.fixed_per_year},
          {"fixed", std::move(fixed)}, {"advice", advice_json(answer.advice)}};
}

Json stream_json(const StreamNotice& stream, const Settings& settings) {
  Json json{{"kind", stream.stream.chart ? "chart" : "comparison"},
            {"name", name_of(settings, stream.stream)},
            {"met", stream.notice ? Json(stream.notice->met) : Json(nullptr)},
            {"sd_not_known_of", stream.missing.empty() ? Json(nullptr) : Json(stream.missing)}};
  if (!stream.notice) return json;
  const Notice& notice = *stream.notice;
  json["in_time"] = notice.readings;
  put(json, "share_in_time", notice.share);
  put(json, "half", notice.median);
  json["half_hours"] = notice.median_time ? Json(hours(*notice.median_time)) : Json(nullptr);
  json["least_shift_in_time"] = or_null(notice.shift);
  json["advice"] = advice_json(stream.advice);
  return json;
}

Json notice_answer_json(const NoticeAnswer& answer, const Settings& settings) {
  Json analyzers = Json::array(), streams = Json::array();
  for (const AnalyzerNotice& analyzer : answer.analyzers) {
    Json watched = Json::array();
    for (const std::size_t i : analyzer.streams)
      watched.push_back(name_of(settings, answer.streams[i].stream));
    analyzers.push_back({{"analyzer", settings.of(analyzer.analyzer).id},
                         {"met", analyzer.met},
                         {"watched_by", std::move(watched)}});
  }
  for (const StreamNotice& stream : answer.streams) streams.push_back(stream_json(stream, settings));
  const Measurand& measurand = settings.of(answer.wish.measurand);
  return {{"measurand", measurand.id},    {"shift", answer.wish.wish.shift},
          {"unit", measurand.unit},       {"within_hours", hours(answer.wish.wish.within)},
          {"met", answer.met()},          {"analyzers", std::move(analyzers)},
          {"streams", std::move(streams)}};
}

Json false_alerts_json(const FalseAlerts& all, const Settings& settings) {
  Json json{{"allowed_per_year", settings.alarm_budget.allowed_per_year}};
  put(json, "per_year", all.per_year);
  Json kinds = Json::object();
  for (const auto& [kind, per_year] : all.by_kind) put(kinds, kind, per_year);
  json["by_kind"] = std::move(kinds);
  return json;
}

}  // namespace

std::string plan_json(const Plan& plan, const Config& config) {
  const Settings& settings = *config.settings;
  Json charts = Json::array(), comparisons = Json::array();
  for (std::uint32_t i = 0; i < plan.charts.size(); ++i) charts.push_back(chart_json(plan, settings, {i}));
  for (std::uint32_t i = 0; i < plan.comparisons.size(); ++i)
    comparisons.push_back(comparison_json(plan, settings, {i}));
  const Json json{{"site", settings.site},
                  {"configuration", config.file.string()},
                  {"journal", plan.seen.journal},
                  {"trials", plan.trials},
                  {"readings_before", kReadingsBefore},
                  {"pairs_before", kPairsBefore},
                  {"all_wishes_met", plan.all_met()},
                  {"false_alerts", false_alerts_json(plan.false_alerts, settings)},
                  {"charts", std::move(charts)},
                  {"comparisons", std::move(comparisons)},
                  {"wish_false_alerts_per_year",
                   plan.budget ? budget_answer_json(*plan.budget, settings) : Json(nullptr)},
                  {"wish_notice", plan.notice ? notice_answer_json(*plan.notice, settings) : Json(nullptr)}};
  return json.dump(2, ' ', false, Json::error_handler_t::replace) + '\n';
}

}  // namespace agreed::plan
