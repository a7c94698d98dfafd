#include "daemon/render/chart_json.hpp"

#include "daemon/render/chart_range.hpp"
#include "daemon/render/classical_json.hpp"
#include "daemon/render/json_parts.hpp"

namespace agreed {
namespace {

Json baseline_of(const BaselineView& baseline) {
  const bool known = baseline.sigma.has_value();
  return {{"readings", baseline.readings},
          {"needed", baseline.needed},
          {"center", json_number(baseline.center)},
          {"sd", json_number(baseline.sd)},
          {"sd_degrees_of_freedom", baseline.sd_degrees_of_freedom},
          {"carried_over", baseline.carried_over},
          {"sigma", json_number(baseline.sigma)},
          {"sigma_degrees_of_freedom", json_number(baseline.sigma_degrees_of_freedom)},
          {"sigma_method", "moving_range"},
          {"moving_range_mean", json_number(baseline.moving_range_mean)},
          {"from", json_time(baseline.from)},
          {"to", json_time(baseline.to)},
          {"set_aside", baseline.set_aside},
          {"reason", known ? Json(nullptr) : Json("too few readings in this stretch to know the spread")}};
}

Json limits_of(const ChartView& view) {
  if (!view.upper_limit && !view.lower_limit) return nullptr;
  return {{"upper", json_number(view.upper_limit)}, {"lower", json_number(view.lower_limit)}};
}

Json change_of(const ChangeView& change) {
  return {
      {"score", json_number(change.score)},
      {"limit", json_number(change.limit)},
      {"limit_now", json_number(change.limit_now)},
      {"in_control_run_length", json_number(change.in_control_run_length)},
      {"limit_extrapolated", change.extrapolated},
      {"started_at", json_time(change.started_at)},
      {"started_between", json_period(change.started_between)},
      {"shift", json_number(change.shift)},
      {"reason", change.score ? Json(nullptr) : Json("the change score needs 5 readings in this stretch")}};
}

Json precision_of(const PrecisionView& precision) {
  return {{"score", json_number(precision.score)},
          {"limit", json_number(precision.limit)},
          {"in_control_run_length", json_number(precision.in_control_run_length)},
          {"limit_extrapolated", precision.extrapolated},
          {"ratio_of_sd", json_number(precision.ratio_of_sd)},
          {"reason",
           precision.score ? Json(nullptr) : Json("the precision score needs 7 readings in this stretch")}};
}

Json reference_of(const std::optional<ReferenceView>& reference) {
  if (!reference) return nullptr;
  return {{"value", json_number(reference->value)},
          {"expanded_uncertainty", json_number(reference->expanded_uncertainty)},
          {"coverage_factor", json_number(reference->coverage_factor)},
          {"bias", json_number(reference->bias)},
          {"normalised_error", json_number(reference->normalised_error)},
          {"allowed_bias", json_number(reference->allowed_bias)},
          {"biased", reference->biased}};
}

Json replicates_of(const std::optional<ReplicatesView>& replicates) {
  if (!replicates) return nullptr;
  return {{"runs", replicates->runs},
          {"per_run", json_number(replicates->per_run)},
          {"within_sd", json_number(replicates->within_sd)},
          {"within_degrees_of_freedom", replicates->within_degrees_of_freedom},
          {"between_sd", json_number(replicates->between_sd)},
          {"tell_precision", replicates->tell_precision}};
}

Json effect_of(const std::optional<EffectView>& effect) {
  if (!effect) return nullptr;
  return {{"what", effect->what.empty() ? Json("first_stretch") : Json(effect->what)},
          {"at", to_rfc3339(effect->at)},
          {"readings_before", effect->readings_before},
          {"readings_after", effect->readings_after},
          {"mean_before", json_number(effect->mean_before)},
          {"mean_after", json_number(effect->mean_after)},
          {"difference", json_number(effect->difference)},
          {"low", json_number(effect->low)},
          {"high", json_number(effect->high)},
          {"confidence", json_number(effect->confidence)},
          {"allowable", json_number(effect->allowable)}};
}

Json warnings_of(const ChartView& view, const std::optional<StandardRange>& range) {
  Json all = view.warnings;
  if (range) all.push_back("range_not_covered");
  return all;
}

Json warning_details_of(const ChartView& view, const std::optional<StandardRange>& range) {
  Json all = Json::object();
  if (range)
    all["range_not_covered"] = {{"lowest", json_number(range->lowest)},
                                {"highest", json_number(range->highest)},
                                {"levels", range->uncovered}};
  for (const WarningNumbers& behind : view.warning_numbers)
    for (const auto& [name, value] : behind.numbers) all[behind.warning][name] = json_number(value);
  return all;
}

Json point_of(const ChartPoint& point) {
  Json signals = Json::array();
  for (const ChartSignal signal : point.signals) signals.push_back(to_string(signal));
  Json json = {{"measured_at", to_rfc3339(point.measured_at)},
               {"value", json_number(point.value)},
               {"moving_range", json_number(point.moving_range)},
               {"score", json_number(point.score)},
               {"precision_score", json_number(point.precision_score)},
               {"upper", json_number(point.upper)},
               {"lower", json_number(point.lower)},
               {"signals", std::move(signals)},
               {"replicates", point.replicates},
               {"within_sd", json_number(point.within_sd)},
               {"set_aside", point.set_aside},
               {"starts_stretch", point.starts_stretch}};
  if (point.classical) add_classical(json, *point.classical);
  return json;
}

Json points_of(const ChartView& view, int points) {
  const std::size_t wanted = std::min(view.points.size(), static_cast<std::size_t>(points));
  Json list = Json::array();
  for (std::size_t i = view.points.size() - wanted; i < view.points.size(); ++i)
    list.push_back(point_of(view.points[i]));
  return list;
}

Json marks_of(const ChartView& view) {
  Json list = Json::array();
  for (const StretchMark& mark : view.marks)
    list.push_back({{"at", to_rfc3339(mark.at)}, {"what", mark.what}});
  return list;
}

/// A chart that the engine has not shown yet is shown as it begins.
ChartView view_of(const Snapshot& snapshot, ChartIndex index) {
  if (index.value < snapshot.charts.size() && snapshot.charts[index.value])
    return *snapshot.charts[index.value];
  ChartView view;
  view.baseline.needed = snapshot.settings->of(index).baseline;
  return view;
}

Json chart_of(const Snapshot& snapshot, ChartIndex index, int points) {
  const Settings& settings = *snapshot.settings;
  const ChartSettings& chart = settings.of(index);
  const ChartView view = view_of(snapshot, index);
  const auto range = range_not_covered(snapshot, index);
  Json limits = limits_of(view);
  const Json limits_reason =
      limits.is_null() ? Json("too few readings to say what the next one may be") : Json(nullptr);
  Json json = {{"analyzer", settings.of(chart.analyzer).id},
               {"standard", settings.of(chart.standard).id},
               {"lot", json_words(view.lot)},
               {"measurand", settings.of(chart.measurand).id},
               {"unit", settings.of(chart.measurand).unit},
               {"state", to_string(view.state)},
               {"pattern", json_words(view.pattern)},
               {"method", chart.method == ChartMethod::change_point ? "change_point" : "classical"},
               {"baseline", baseline_of(view.baseline)},
               {"limits", std::move(limits)},
               {"limits_reason", limits_reason},
               {"change", change_of(view.change)},
               {"precision", precision_of(view.precision)},
               {"serial_correlation", json_number(view.serial_correlation)},
               {"serial_correlation_allowed_for", json_number(view.correlation_allowed_for)},
               {"censored", view.censored},
               {"replicates", replicates_of(view.replicates)},
               {"smallest_shift", json_number(view.smallest_shift)},
               {"intervention_effect", effect_of(view.intervention_effect)},
               {"since_first", effect_of(view.since_first)},
               {"reference", reference_of(view.reference)},
               {"warnings", warnings_of(view, range)},
               {"warning_details", warning_details_of(view, range)},
               {"marks", marks_of(view)},
               {"points", points_of(view, points)}};
  if (chart.method == ChartMethod::classical) make_classical(json, chart, view);
  return json;
}

}  // namespace

std::string chart_json(const Snapshot& snapshot, ChartIndex index, int points) {
  return json_text(chart_of(snapshot, index, points));
}

std::string charts_json(const Snapshot& snapshot, int points) {
  Json list = Json::array();
  for (std::uint32_t i = 0; i < snapshot.settings->charts.size(); ++i)
    list.push_back(chart_of(snapshot, ChartIndex{i}, points));
  return json_text({{"charts", std::move(list)}});
}

}  // namespace agreed
