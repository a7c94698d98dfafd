// Classical charts in the configuration: what is read, what cannot be meant, what is warned of.
#include <string>

#include <doctest/doctest.h>

#include "config/config.hpp"

using namespace agreed;
using doctest::Approx;

namespace {

/// Harrow Mill with one check standard; `charts` for all, `own` of its protein.
std::string mill(const std::string& charts, const std::string& own = "{}", const std::string& more = "") {
  return "site: Harrow Mill\n"
         "analyzers: {line1: {inbox: drop/line1}, line2: {inbox: drop/line2}}\n"
         "measurands:\n"
         "  protein: {unit: g/100 g, decimals: 2}\n"
         "check_standards:\n"
         "  wheat-low: {every: 8h, measurands: {protein: " +
         own + "}}\n" + more + "charts: {" + charts + "}\n";
}

std::string told(const ConfigResult& result) {
  std::string text;
  for (const ConfigProblem& problem : result.problems) text += to_string(problem, "f") + '\n';
  return text;
}

ChartSettings chart_of(const std::string& text) {
  const ConfigResult result = parse_config(text, "/nowhere/agreed.yaml");
  REQUIRE_MESSAGE(result.config.has_value(), told(result));
  return result.config->settings->charts.at(0);
}

const char* const kOthers = "  wheat-high: {measurands: {protein: {}}}\n";

}  // namespace

TEST_CASE("everything that a classical chart can be told is read") {
  const ChartSettings chart = chart_of(mill(
      "method: classical, baseline: 40, clear_after: 5, run_spread: range, center: 10.62, sigma: 0.021, "
      "sigma_degrees_of_freedom: 18, ewma: {weight: 0.2, width: 2.86}, cusum: {allowance: 0.5, limit: 5}, "
      "run_rules: [{same_side: 9}, {trend: 6}, {two_of_three_beyond: 2}, {four_of_five_beyond: 1}, "
      "{alternating: 14}, {near_centre: 15, away_from_centre: 8}]"));
  CHECK(chart.method == ChartMethod::classical);
  CHECK(chart.baseline == 40);
  CHECK(chart.clear_after == 5);
  const ClassicalSettings& chosen = chart.classical;
  CHECK(chosen.run_spread == RunSpread::range);
  CHECK(chosen.center.value() == Approx(10.62));
  CHECK(chosen.sigma.value() == Approx(0.021));
  CHECK(chosen.sigma_degrees_of_freedom.value() == Approx(18));
  CHECK(chosen.ewma_weight.value() == Approx(0.2));
  CHECK(chosen.ewma_width.value() == Approx(2.86));
  CHECK(chosen.cusum_allowance.value() == Approx(0.5));
  CHECK(chosen.cusum_limit.value() == Approx(5));
  CHECK(chosen.run_rules == RunRules{9, 6, 2, 1, 14, 15, 8});
  CHECK(chart.expected.ewma == Approx(365.9).epsilon(2e-4));
  CHECK(chart.expected.cusum == Approx(465.4).epsilon(1e-4));
}

TEST_CASE("what stands nearest to a chart counts: its measurand's, its check standard's, that for all") {
  const std::string own = "{charts: {method: classical, center: 10.62}}";
  const ConfigResult result =
      parse_config(mill("baseline: 25, clear_after: 4", own, kOthers), "/nowhere/agreed.yaml");
  REQUIRE_MESSAGE(result.config.has_value(), told(result));
  const auto& charts = result.config->settings->charts;
  REQUIRE(charts.size() == 4);
  CHECK(charts[0].method == ChartMethod::change_point);  // wheat-high
  CHECK(charts[1].method == ChartMethod::classical);
  CHECK(charts[1].baseline == 25);
  CHECK(charts[1].classical.center.value() == Approx(10.62));
  CHECK_FALSE(charts[0].classical.center);
}

TEST_CASE("the alarm budget counts a classical chart by what its limits cost, the others keep their share") {
  const std::string own = "{charts: {method: classical, center: 10.62, sigma: 0.02}}";
  const ConfigResult result = parse_config(mill("baseline: 30", own, kOthers), "/nowhere/agreed.yaml");
  REQUIRE_MESSAGE(result.config.has_value(), told(result));
  const Settings& settings = *result.config->settings;
  CHECK(settings.charts[1].expected.readings == Approx(105.33).epsilon(1e-4));
  CHECK(settings.charts[0].level_run_length == Approx(1095 / (6.0 / 4 / 2)));
  CHECK_FALSE(settings.charts[1].own_run_length);
  CHECK(settings.alarm_budget.expected_per_year == Approx(2 * 6.0 / 4 + 2 * 1095 / 105.33).epsilon(1e-4));
}

TEST_CASE("what cannot be meant is told at its place") {
  struct Fault {
    const char* name;
    std::string text;
    const char* key;
    const char* message;
  };
  const std::string several =
      "  wheat-new: {lots: [{lot: A}, {lot: B, from: \"2026-01-05T06:00:00Z\"}], "
      "measurands: {protein: {charts: {method: classical, center: 10}}}}\n";
  const Fault faults[] = {
      {"run rules without the method", mill("run_rules: [{trend: 6}]"), "charts.run_rules",
       "of classical charts only, expected method: classical"},
      {"the same of one measurand", mill("", "{charts: {center: 10, sigma: 0.02}}"),
       "check_standards.wheat-low.measurands.protein.charts.center", "of classical charts only"},
      {"a sigma without a centre", mill("method: classical, sigma: 0.02"), "charts.sigma",
       "found without center"},
      {"degrees of freedom without a sigma", mill("method: classical, sigma_degrees_of_freedom: 18"),
       "charts.sigma_degrees_of_freedom", "found without sigma"},
      {"an EWMA without a width", mill("method: classical, ewma: {weight: 0.2}"), "charts.ewma.width",
       "missing; expected a number"},
      {"an EWMA that hardly forgets", mill("method: classical, ewma: {weight: 0.001, width: 3}"),
       "charts.ewma.weight", "expected a number from 0.01 to 1"},
      {"a cumulative sum without a limit", mill("method: classical, cusum: {allowance: 0.5}"),
       "charts.cusum.limit", "missing; expected a number"},
      {"a run rule twice", mill("method: classical, run_rules: [{trend: 6}, {trend: 7}]"),
       "charts.run_rules[1].trend", "found twice"},
      {"no run rule", mill("method: classical, run_rules: [{}]"), "charts.run_rules[0]", "found no run rule"},
      {"one centre for two check standards", mill("method: classical, center: 10", "{}", kOthers),
       "charts.center", "found for 2 of check standard and measurand, expected one"},
      {"a centre for two lots", mill("", "{}", several),
       "check_standards.wheat-new.measurands.protein.charts.center", "found for several lots"},
      {"a lot's own charts",
       mill("", "{}", "  wheat-new: {lots: [{lot: A, measurands: {protein: {charts: {baseline: 40}}}}]}\n"),
       "check_standards.wheat-new.lots[0].measurands.protein.charts", "found in a lot"},
  };
  for (const Fault& fault : faults) {
    INFO(fault.name);
    const ConfigResult result = parse_config(fault.text, "/nowhere/agreed.yaml");
    CHECK_FALSE(result.config.has_value());
    INFO(told(result));
    REQUIRE_FALSE(result.problems.empty());
    CHECK(result.problems[0].key == fault.key);
    CHECK(result.problems[0].message.find(fault.message) != std::string::npos);
  }
}

TEST_CASE("what classical limits cost is said, once for all charts of one choice") {
  const ConfigResult plain = parse_config(mill("method: classical", "{}", kOthers), "/nowhere/agreed.yaml");
  INFO(told(plain));
  REQUIRE(plain.problems.size() == 1);
  CHECK(plain.problems[0].warning);
  CHECK(plain.problems[0].key == "charts.method");
  CHECK(plain.problems[0].message.find("a false signal every about 5") != std::string::npos);
  CHECK(plain.problems[0].message.find("105 if centre and sigma were known exactly") != std::string::npos);

  const ConfigResult all = parse_config(
      mill("method: classical, run_rules: [{same_side: 9}, {trend: 6}, {two_of_three_beyond: 2}, "
           "{four_of_five_beyond: 1}, {alternating: 14}, {near_centre: 15}, {away_from_centre: 8}]"),
      "/nowhere/agreed.yaml");
  INFO(told(all));
  REQUIRE(all.problems.size() == 1);
  CHECK(all.problems[0].message.find("all run rules together with the limits: about 7") == 0);

  const ConfigResult own =
      parse_config("false_alerts_per_year: 100\n" + mill("method: classical, in_control_run_length: 5000"),
                   "/nowhere/agreed.yaml");
  INFO(told(own));
  REQUIRE(own.problems.size() == 1);
  CHECK(own.problems[0].key == "charts.in_control_run_length");
  CHECK(own.problems[0].message.find("has no effect on classical charts") == 0);
}
