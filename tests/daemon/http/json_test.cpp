// The JSON of status, charts and comparisons: names, nulls, order, and never a number that is none.
#include <cmath>
#include <limits>

#include <doctest/doctest.h>
#include <nlohmann/json.hpp>

#include "daemon/render/chart_json.hpp"
#include "daemon/render/comparison_json.hpp"
#include "daemon/render/status_json.hpp"
#include "tests/daemon/http/mill_snapshot.hpp"

using namespace agreed;
using namespace agreed::test;
using Json = nlohmann::ordered_json;

namespace {

Json comparison_of(const Snapshot& snapshot) {
  return Json::parse(comparison_json(snapshot, {0}, 100));
}
Json chart_of(const Snapshot& snapshot, std::uint32_t index) {
  return Json::parse(chart_json(snapshot, {index}, 100));
}

/// That `json` has the fields of `names`, in that order; others may stand between them.
void check_fields(const Json& json, std::initializer_list<const char*> names) {
  auto field = json.begin();
  for (const char* name : names) {
    CAPTURE(name);
    REQUIRE(json.contains(name));
    while (field != json.end() && field.key() != name) ++field;
    CHECK(field != json.end());
  }
}

std::string overall_with(Verdict verdict, int hours_ago, int open = 0, int critical = 0) {
  Snapshot snapshot = full_snapshot();
  ComparisonView view = full_comparison();
  view.verdict = verdict;
  view.window.to = snapshot.at;
  view.verdict_since = snapshot.at - std::chrono::hours(hours_ago);
  snapshot.comparisons[0] = std::make_shared<const ComparisonView>(view);
  snapshot.alerts_open = open;
  snapshot.alerts_critical = critical;
  return overall(snapshot);
}

}  // namespace

TEST_CASE("the status in full, byte for byte") {
  Snapshot snapshot = full_snapshot();
  const std::string status = status_json(snapshot);
  Json json = Json::parse(status);
  json["service"]["version"] = "V";
  const std::string expected =
      R"({"site":"Harrow Mill","service":{"version":"V","started_at":"2026-01-05T09:00:00.000Z","uptime_s":3600,)"
      R"("config_sha256":"cccccccccccccccccccccccccccccccccccccccccccccccccccccccccccccccc",)"
      R"("config_since":null,"ready":true},)"
      R"("at":"2026-01-05T10:00:00.000Z","overall":"attention",)"
      R"("intake":{"pending_files":2,"files":{"done":3,"repeated":1,"rejected":0},)"
      R"("readings":{"accepted":120,"repeated":2,"rejected":1,"voided":1,"censored":1},)"
      R"("last_commit_at":"2026-01-05T09:00:00.000Z"},)"
      R"("analyzers":[{"id":"line1","title":"NIR analyzer, packing line 1",)"
      R"("inbox":{"reachable":true,"reason":null,"since":null,"pending":2,"growing":[]},"last_reading_at":"2026-01-05T09:00:00.000Z",)"
      R"("charts":{"stable":0,"unstable":1,"learning":1}},)"
      R"({"id":"line2","title":"NIR analyzer, packing line 2",)"
      R"("inbox":{"reachable":false,"reason":"the folder is not there","since":null,"pending":0,"growing":[]},"last_reading_at":null,)"
      R"("charts":{"stable":0,"unstable":0,"learning":1}}],)"
      R"("comparisons":[{"id":"protein","measurand":"protein","x":"line1","y":"line2","verdict":"agreement_shown",)"
      R"("verdict_since":"2026-01-05T03:00:00.000Z","verdict_reason":null,"agreement_lost_at":null,"pairs":140,)"
      R"("largest_bias":{"level":13.0,"bias":0.02,"allowable":0.2},"alerts":1}],)"
      R"("alerts":{"open":1,"acknowledged":1},)"
      R"("alarm_budget":{"false_alerts_per_year":6.0,"expected":5.5,)"
      R"("by_kind":{"agreement_drifting":1.5,"check_standard_unstable":4.0},"apart":{"agreement_lost":{"subjects":1,"share_at_most":0.06,)"
      R"("of":"comparisons whose bias is exactly the allowable difference, within 1,000 pairs; far fewer below"}}},)"
      R"("chain":{"sequence":7,"sha256":"aaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaa"}})";
  CHECK(json.dump() == expected);
  CHECK(status_json(snapshot) == status);
}

TEST_CASE("right after the start everything configured is there and says that it begins") {
  const Snapshot snapshot = empty_snapshot();
  const Json status = Json::parse(status_json(snapshot));
  CHECK(status.at("overall") == "starting");
  CHECK(status.at("service").at("ready") == false);
  CHECK(status.at("intake").at("last_commit_at").is_null());
  CHECK(status.at("comparisons")[0].at("verdict") == "gathering");
  CHECK(status.at("comparisons")[0].at("largest_bias").is_null());
  CHECK(Json::parse(charts_json(snapshot, 100)).at("charts").size() == 3);
  CHECK(Json::parse(comparisons_json(snapshot, 100)).at("comparisons").size() == 1);
  const Json chart = chart_of(snapshot, 0);
  CHECK(chart.at("state") == "learning");
  CHECK(chart.at("baseline").at("readings") == 0);
  CHECK(chart.at("baseline").at("needed") == 30);
  CHECK(chart.at("baseline").at("sigma").is_null());
  CHECK(chart.at("baseline").at("reason").is_string());
  CHECK(chart.at("limits").is_null());
  CHECK(chart.at("limits_reason").is_string());
  CHECK(chart.at("change").at("score").is_null());
  CHECK(chart.at("change").at("reason").is_string());
  CHECK(chart.at("reference").is_null());
  CHECK(chart.at("points") == Json::array());
  CHECK(chart.at("warnings") == Json::array());
  const Json comparison = comparison_of(snapshot);
  CHECK(comparison.at("verdict") == "gathering");
  CHECK(comparison.at("fit").is_null());
  CHECK(comparison.at("fit_reason").is_string());
  CHECK(comparison.at("error").at("lambda").is_null());
  CHECK(comparison.at("error").at("reason").is_string());
  CHECK(comparison.at("difference").is_null());
  CHECK(comparison.at("pair_chart").at("state") == "learning");
  CHECK(comparison.at("window").at("capacity") == 200);
  CHECK(comparison.at("levels") == Json::array());
  CHECK(comparison.at("pairs") == Json::array());
}

TEST_CASE("overall is the worst that is to be told") {
  CHECK(overall_with(Verdict::agreement_shown, 1) == "ok");
  CHECK(overall_with(Verdict::agreement_shown, 1, 1) == "attention");
  CHECK(overall_with(Verdict::agreement_shown, 1, 1, 1) == "alert");
  CHECK(overall_with(Verdict::disagreement_shown, 1) == "alert");
  CHECK(overall_with(Verdict::gathering, 1) == "attention");
  CHECK(overall_with(Verdict::inconclusive, 24) == "ok");  // prove_within is 24 h here
  CHECK(overall_with(Verdict::inconclusive, 25) == "attention");
  Snapshot starting = full_snapshot();
  starting.started = starting.ready = false;
  starting.alerts_critical = 1;
  CHECK(std::string(overall(starting)) == "starting");
}

TEST_CASE("prove_within is counted in the times of the pairs, and agreement that is lost is an alert") {
  Snapshot snapshot = full_snapshot();
  snapshot.alerts_open = snapshot.alerts_critical = 0;
  ComparisonView view = full_comparison();
  view.verdict = Verdict::inconclusive;
  view.verdict_since = *view.window.to - std::chrono::hours(24);
  const auto overall_now = [&] {
    snapshot.comparisons[0] = std::make_shared<const ComparisonView>(view);
    return std::string(overall(snapshot));
  };
  CHECK(overall_now() == "ok");  // however long ago the newest pair was measured
  view.verdict_since = *view.window.to - std::chrono::hours(25);
  CHECK(overall_now() == "attention");
  view.agreement_lost = view.window.to;
  CHECK(overall_now() == "alert");
}

TEST_CASE("what a comparison says of its proof, its relation and agreement that was lost") {
  Snapshot snapshot = full_snapshot();
  ComparisonView view = full_comparison();
  CHECK(comparison_of(snapshot).at("proof").is_null());
  CHECK(comparison_of(snapshot).at("relation").is_null());
  CHECK(comparison_of(snapshot).at("agreement_lost_at").is_null());
  CHECK(comparison_of(snapshot).at("pair_chart").at("against") == "own_line");
  ProofView proof;
  proof.overdue = true;
  proof.level = 13;
  proof.more_pairs = 24;
  proof.residual_sd = 0.03;
  proof.sd_needed = 0.02;
  view.proof = proof;
  view.agreement_lost = at_hour(3);
  view.pair_chart.against_established_line = true;
  snapshot.comparisons[0] = std::make_shared<const ComparisonView>(view);
  Settings settings = *snapshot.settings;
  settings.comparisons[0].relation = EstablishedLine{-0.1, 1.02};
  settings.measurands[0].decision_levels = {13};
  settings.measurands[0].allowable = AllowableDifference{0.2, {}};
  settings.charts[0].lots[0].reference = ReferenceValue{10.6, 0.08, 2};
  snapshot.settings = std::make_shared<const Settings>(settings);
  const Json json = comparison_of(snapshot);
  CHECK(
      json.at("proof").dump() ==
      R"({"overdue":true,"level":13.0,"aim":"agreement_shown","more_pairs":24,"residual_sd":0.03,"sd_needed":0.02,"reason":null})");
  CHECK(json.at("relation").dump() == R"({"intercept":-0.1,"slope":1.02})");
  CHECK(json.at("agreement_lost_at") == "2026-01-05T03:00:00.000Z");
  CHECK(json.at("pair_chart").at("against") == "established_line");
  const Json apart = Json::parse(status_json(snapshot)).at("alarm_budget").at("apart");
  CHECK(apart.at("agreement_lost").at("subjects") == 1);
  CHECK(apart.at("agreement_lost").at("share_at_most") == 0.06);
  CHECK(apart.at("check_standard_biased").at("subjects") == 1);
}

TEST_CASE("a service that stopped taking results in is not starting again") {
  Snapshot troubled = full_snapshot();
  troubled.ready = false;
  troubled.alerts_open = troubled.alerts_critical = 0;
  CHECK(std::string(overall(troubled)) == "attention");
  troubled.alerts_critical = 1;
  CHECK(std::string(overall(troubled)) == "alert");
}

TEST_CASE("the largest bias is the one that uses most of what is allowable") {
  Snapshot snapshot = full_snapshot();
  ComparisonView view = full_comparison();
  view.levels[0].bias = -0.05;
  view.levels[0].allowable = 0.1;  // half
  view.levels[1].bias = 0.06;
  view.levels[1].allowable = 0.2;  // a third
  snapshot.comparisons[0] = std::make_shared<const ComparisonView>(view);
  const Json largest = Json::parse(status_json(snapshot)).at("comparisons")[0].at("largest_bias");
  CHECK(largest == Json{{"level", 10.5}, {"bias", -0.05}, {"allowable", 0.1}});
}

TEST_CASE("a chart has the fields of the contract, in its order") {
  const Json chart = chart_of(full_snapshot(), 1);
  check_fields(chart, {"analyzer", "standard", "lot", "measurand", "unit", "state", "method", "baseline",
                       "limits", "change", "precision", "serial_correlation", "intervention_effect",
                       "since_first", "reference", "warnings", "points"});
  check_fields(chart.at("baseline"),
               {"readings", "needed", "center", "sd", "sigma", "sigma_degrees_of_freedom", "sigma_method",
                "moving_range_mean", "from", "to", "set_aside"});
  check_fields(chart.at("change"),
               {"score", "limit", "in_control_run_length", "started_at", "started_between", "shift"});
  check_fields(chart.at("precision"), {"score", "limit", "in_control_run_length", "ratio_of_sd"});
  check_fields(chart.at("reference"),
               {"value", "expanded_uncertainty", "coverage_factor", "bias", "normalised_error"});
  CHECK(chart.at("state") == "unstable");
  CHECK(chart.at("limits") == Json{{"upper", 10.71}, {"lower", 10.53}});
  CHECK(chart.at("baseline").at("reason").is_null());
  CHECK(chart.at("change").at("started_between") ==
        Json::array({"2026-01-05T06:00:00.000Z", "2026-01-05T08:00:00.000Z"}));
  CHECK(chart.at("precision").at("ratio_of_sd").is_null());
  CHECK(chart.at("intervention_effect").is_null());
  REQUIRE(chart.at("points").size() == 7);
  check_fields(chart.at("points")[0],
               {"measured_at", "value", "moving_range", "score", "precision_score", "signals", "set_aside"});
  CHECK(chart.at("points")[0].at("moving_range").is_null());
  CHECK(chart.at("points")[0].at("score").is_null());
  CHECK(chart.at("points")[0].at("signals") == Json::array());
  CHECK(chart.at("points")[6].at("signals") == Json::array({"single_high", "shift_up"}));
}

TEST_CASE("a comparison has the fields of the contract, in its order") {
  const Json comparison = comparison_of(full_snapshot());
  check_fields(comparison, {"id",          "measurand",     "unit",           "x",          "y",
                            "verdict",     "verdict_since", "verdict_reason", "warnings",   "window",
                            "error",       "fit",           "levels",         "difference", "robust",
                            "concordance", "scatter",       "range",          "pair_chart", "diagnosis",
                            "look_back",   "outliers",      "pairs"});
  check_fields(comparison.at("window"), {"pairs", "capacity", "from", "to", "since_intervention"});
  check_fields(comparison.at("error"),
               {"lambda", "lambda_is", "low", "high", "sd_x", "sd_y", "df_x", "df_y", "source"});
  check_fields(comparison.at("fit"), {"method", "intercept", "slope", "se_intercept", "se_slope", "cov",
                                      "se_method", "intercept_interval", "slope_interval", "confidence",
                                      "identity_p", "slope_at_lambda_low", "slope_at_lambda_high"});
  check_fields(comparison.at("levels")[0],
               {"level", "bias", "se", "low", "high", "allowable", "verdict", "reason", "single_result"});
  check_fields(comparison.at("difference"),
               {"mean", "sd", "mean_interval", "lower_limit", "upper_limit", "lower_limit_interval",
                "upper_limit_interval", "within_allowable", "paired_t_p"});
  check_fields(comparison.at("pair_chart"), {"state", "pairs", "score", "limit", "critical_limit",
                                             "in_control_run_length", "started_at", "started_between"});
  check_fields(comparison.at("pairs")[0], {"sample", "measured_at", "x", "y", "x_replicates", "y_replicates",
                                           "residual", "in_window", "outlier"});
  CHECK(comparison.at("error").at("lambda_is") == "var(x error)/var(y error)");
  CHECK(comparison.at("error").at("reason").is_null());
  CHECK(comparison.at("fit").at("method") == "deming");
  CHECK(comparison.at("fit").at("se_method") == "jackknife");
  CHECK(comparison.at("fit").at("analytic_se_slope") == 0.0041);
  CHECK(comparison.at("fit").at("slope_interval") == Json::array({0.99, 1.006}));
  CHECK(comparison.at("difference").at("within_allowable") ==
        Json{{"count", 139}, {"of", 140}, {"interval", Json::array({0.96, 1.0})}});
  CHECK(comparison.at("levels")[1].at("single_result").is_null());
  CHECK(comparison.at("verdict_reason").is_null());
  check_fields(comparison.at("robust"),
               {"method", "slope", "slope_interval", "intercept", "intercept_interval"});
  CHECK(comparison.at("robust").at("method") == "passing_bablok");
  CHECK(comparison.at("robust").at("slope_interval") == Json::array({0.99, 1.012}));
  CHECK(comparison.at("robust").at("intercept_interval").is_null());
  CHECK(comparison.at("concordance") == 0.998);
  const Json& diagnosis = comparison.at("diagnosis");
  check_fields(diagnosis, {"moved", "evidence", "probability", "shift_pairs", "shift_x", "shift_y",
                           "started_at", "started_between"});
  CHECK(diagnosis.at("moved") == "y");
  CHECK(diagnosis.at("probabilities").at("both") == 0.02);
  CHECK(diagnosis.at("shift_x").is_null());
  CHECK(diagnosis.at("started_between").size() == 2);
  check_fields(comparison.at("look_back"), {"from", "to", "pairs", "samples"});
  CHECK(comparison.at("look_back").at("from_is") == "agreement_shown");
  CHECK(comparison.at("look_back").at("samples") == Json::array({"S-105", "S-106"}));
}

TEST_CASE("a comparison with nothing to say has the same fields, null") {
  Snapshot snapshot = full_snapshot();
  snapshot.comparisons[0] = std::make_shared<const ComparisonView>();
  const Json comparison = comparison_of(snapshot);
  for (const char* name :
       {"fit", "difference", "robust", "concordance", "scatter", "range", "diagnosis", "look_back"})
    CHECK(comparison.at(name).is_null());
}

TEST_CASE("a number that is none becomes null everywhere: the text stays JSON without NaN or Infinity") {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  const double infinity = std::numeric_limits<double>::infinity();
  Snapshot snapshot = full_snapshot();
  ChartView chart = full_chart();
  chart.baseline.sd = nan;
  chart.upper_limit = infinity;
  chart.change.limit = -infinity;
  chart.reference->bias = nan;
  chart.points[0].value = nan;
  snapshot.charts[1] = std::make_shared<const ChartView>(chart);
  ComparisonView comparison = full_comparison();
  comparison.fit->slope = nan;
  comparison.fit->slope_interval = {-infinity, infinity};
  comparison.error.high = infinity;
  comparison.levels[1].bias = nan;
  comparison.pairs[0].y = nan;
  snapshot.comparisons[0] = std::make_shared<const ComparisonView>(comparison);
  for (const std::string& text :
       {status_json(snapshot), charts_json(snapshot, 500), comparisons_json(snapshot, 500)}) {
    CHECK(Json::accept(text));
    CHECK(text.find("nan") == std::string::npos);
    CHECK(text.find("inf,") == std::string::npos);
  }
  CHECK(comparison_of(snapshot).at("fit").at("slope_interval") == Json::array({nullptr, nullptr}));
  CHECK(chart_of(snapshot, 1).at("points")[0].at("value").is_null());
  CHECK(Json::parse(status_json(snapshot)).at("comparisons")[0].at("largest_bias").at("level") == 10.5);
}

TEST_CASE("every double comes back to the last bit") {
  Snapshot snapshot = full_snapshot();
  ComparisonView view = full_comparison();
  view.fit->slope = 1.0 / 3.0;
  view.fit->intercept = 5e-324;
  view.fit->cov = -1.7976931348623157e308;
  snapshot.comparisons[0] = std::make_shared<const ComparisonView>(view);
  const Json fit = comparison_of(snapshot).at("fit");
  CHECK(fit.at("slope").get<double>() == view.fit->slope);
  CHECK(fit.at("intercept").get<double>() == view.fit->intercept);
  CHECK(fit.at("cov").get<double>() == view.fit->cov);
}

TEST_CASE("names with bytes that are not UTF-8 do not break the answer") {
  Snapshot snapshot = full_snapshot();
  ComparisonView view = full_comparison();
  view.pairs[0].sample = "S-\xff\"<script>\n";
  snapshot.comparisons[0] = std::make_shared<const ComparisonView>(view);
  CHECK(comparison_of(snapshot).at("pairs")[0].at("sample") == "S-\xEF\xBF\xBD\"<script>\n");
}

TEST_CASE("a classical chart has limits, blocks and a run length in place of scores") {
  Snapshot snapshot = full_snapshot();
  auto settings = std::make_shared<Settings>(*snapshot.settings);
  ChartSettings& asked = settings->charts[1];
  asked.method = ChartMethod::classical;
  asked.classical.ewma_weight = 0.2;
  asked.classical.ewma_width = 2.86;
  asked.classical.run_rules.same_side = 9;
  asked.expected = {52.1, 1.1, 92.5, 0.6, 370.4, 105.3, 152.7, 365.9, 0};
  snapshot.settings = settings;
  ChartView view = full_chart();
  view.classical = ClassicalView{};
  view.classical->center = 10.62;
  view.classical->sigma = 0.02;
  view.classical->moving_range_upper = 0.0737;
  ClassicalPoint judged;
  judged.ewma = 10.63;
  view.points.back().classical = judged;
  view.points.back().signals = {ChartSignal::above_limit, ChartSignal::moving_range_above_limit};
  snapshot.charts[1] = std::make_shared<const ChartView>(view);

  const Json chart = chart_of(snapshot, 1);
  CHECK(chart.at("method") == "classical");
  CHECK(chart.at("change").is_null());
  CHECK(chart.at("precision").is_null());
  CHECK(chart.at("limits").at("moving_range_upper") == 0.0737);
  CHECK(chart.at("limits").at("source") == "baseline");
  CHECK(chart.at("ewma").at("weight") == 0.2);
  CHECK(chart.at("ewma").at("value") == 10.63);
  CHECK(chart.at("ewma").at("upper").is_null());
  CHECK(chart.at("cusum").is_null());
  CHECK(chart.at("run_rules") == Json({{"same_side", 9}}));
  CHECK(chart.at("expected_run_length") == 52.1);
  CHECK(chart.at("run_length").at("known_parameters") == 92.5);
  CHECK(chart.at("run_length").at("limits_and_run_rules") == 152.7);
  CHECK(chart.at("run_length").at("cusum").is_null());
  CHECK(chart.at("points").back().at("signals") == Json({"above_limit", "moving_range_above_limit"}));
  CHECK(chart.at("points").back().at("ewma") == 10.63);
}
