#include "daemon/render/classical_json.hpp"

namespace agreed {
namespace {

/// Nothing where it is 0: not chosen.
Json run_length(double readings) {
  return readings > 0 ? json_number(readings) : Json(nullptr);
}

const char* source_of(const ClassicalView& view) {
  if (view.sigma_given) return "given";
  return view.center_given ? "given_center" : "baseline";
}

void add_limits(Json& chart, const ClassicalView& view) {
  if (!view.center || chart.at("limits").is_null()) return;
  Json& limits = chart.at("limits");
  limits["moving_range_upper"] = json_number(view.moving_range_upper);
  limits["center"] = json_number(view.center);
  limits["sigma"] = json_number(view.sigma);
  limits["sigma_degrees_of_freedom"] = json_number(view.sigma_degrees_of_freedom);
  limits["sigma_method"] = view.sigma_given ? "given" : view.within_runs ? "within_runs" : "moving_range";
  limits["source"] = source_of(view);
}

Json ewma_of(const ClassicalSettings& chosen, const ClassicalPoint& newest) {
  if (!chosen.ewma_weight || !chosen.ewma_width) return nullptr;
  return {{"weight", json_number(chosen.ewma_weight)},
          {"width", json_number(chosen.ewma_width)},
          {"value", json_number(newest.ewma)},
          {"upper", json_number(newest.ewma_upper)},
          {"lower", json_number(newest.ewma_lower)}};
}

Json cusum_of(const ClassicalSettings& chosen, const ClassicalPoint& newest) {
  if (!chosen.cusum_allowance || !chosen.cusum_limit) return nullptr;
  return {{"allowance", json_number(chosen.cusum_allowance)},
          {"limit", json_number(chosen.cusum_limit)},
          {"upper", json_number(newest.cusum_upper)},
          {"lower", json_number(newest.cusum_lower)}};
}

Json rules_of(const RunRules& rules) {
  Json json = Json::object();
  const auto add = [&](const char* name, int count) {
    if (count > 0) json[name] = count;
  };
  add("same_side", rules.same_side);
  add("trend", rules.trend);
  add("two_of_three_beyond", rules.two_of_three_beyond);
  add("four_of_five_beyond", rules.four_of_five_beyond);
  add("alternating", rules.alternating);
  add("near_centre", rules.near_centre);
  add("away_from_centre", rules.away_from_centre);
  return json;
}

Json run_length_of(const ExpectedRunLength& expected) {
  return {{"standard_error", json_number(expected.standard_error)},
          {"known_parameters", run_length(expected.known_parameters)},
          {"known_parameters_standard_error", json_number(expected.known_standard_error)},
          {"limits", run_length(expected.limits)},
          {"limits_and_moving_range", run_length(expected.limits_and_moving_range)},
          {"limits_and_run_rules", run_length(expected.limits_and_run_rules)},
          {"ewma", run_length(expected.ewma)},
          {"cusum", run_length(expected.cusum)}};
}

}  // namespace

void make_classical(Json& chart, const ChartSettings& settings, const ChartView& view) {
  const ClassicalPoint newest =
      view.points.empty() ? ClassicalPoint{} : view.points.back().classical.value_or(ClassicalPoint{});
  chart.at("change") = nullptr;
  chart.at("precision") = nullptr;
  if (view.classical) {
    add_limits(chart, *view.classical);
    if (view.classical->alarm_started_at)
      chart["shift"] = {{"started_at", json_time(view.classical->alarm_started_at)},
                        {"shift", json_number(view.classical->shift)}};
  }
  chart["ewma"] = ewma_of(settings.classical, newest);
  chart["cusum"] = cusum_of(settings.classical, newest);
  chart["run_rules"] = rules_of(settings.classical.run_rules);
  chart["expected_run_length"] = run_length(settings.expected.readings);
  chart["run_length"] = run_length_of(settings.expected);
}

void add_classical(Json& point, const ClassicalPoint& classical) {
  point["moving_range_upper"] = json_number(classical.moving_range_upper);
  point["spread"] = json_number(classical.spread);
  point["spread_upper"] = json_number(classical.spread_upper);
  point["ewma"] = json_number(classical.ewma);
  point["ewma_upper"] = json_number(classical.ewma_upper);
  point["ewma_lower"] = json_number(classical.ewma_lower);
  point["cusum_upper"] = json_number(classical.cusum_upper);
  point["cusum_lower"] = json_number(classical.cusum_lower);
}

}  // namespace agreed
