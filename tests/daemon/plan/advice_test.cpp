// What to write into the configuration: rounded to the safe side, valid, and without harm to the others.
#include "daemon/plan/advice.hpp"

#include <doctest/doctest.h>

#include "core/base/budget_entries.hpp"
#include "daemon/plan/plan_words.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace std::chrono_literals;

namespace {

/// Two standards on two analyzers, read every 8 h, and a comparison every 2 h: a share is 1.2 a year.
Settings mill() {
  Settings settings;
  settings.analyzers = {{"line1", ""}, {"line2", ""}};
  settings.measurands.resize(1);
  settings.measurands[0].id = "protein";
  settings.standards = {{"wheat-high", ""}, {"wheat-low", ""}};
  for (std::uint32_t analyzer = 0; analyzer < 2; ++analyzer)
    for (std::uint32_t standard = 0; standard < 2; ++standard) {
      ChartSettings chart;
      chart.analyzer = {analyzer};
      chart.standard = {standard};
      chart.every = 8h;
      settings.charts.push_back(chart);
    }
  ComparisonSettings comparison;
  comparison.id = "protein";
  comparison.y = {1};
  comparison.every = 2h;
  settings.comparisons.push_back(comparison);
  apply_budget(share_alarm_budget(6, chart_entries(settings), comparison_entries(settings)), settings);
  return settings;
}

RunLengthRemedy run_length(double readings, std::optional<double> allowance) {
  RunLengthRemedy remedy;
  remedy.in_control_run_length = readings;
  remedy.false_alerts_per_year = allowance;
  return remedy;
}

double number(const std::string& text) {
  return std::stod(text);
}

}  // namespace

TEST_CASE("three digits, to the side that is safe") {
  CHECK(rounded_down(0.012345) == 0.0123);
  CHECK(rounded_up(0.012345) == 0.0124);
  CHECK(rounded_down(0.29) == 0.29);
  CHECK(rounded_up(0.29) == 0.29);
  CHECK(rounded_up(6.600361) == 6.61);
  CHECK(rounded_down(12345) == 12300);
  CHECK(rounded_up(12345) == 12400);
  CHECK(rounded_down(2) == 2);
  CHECK(rounded_down(0.1 + 0.2) == 0.3);  // 0.30000000000000004
  CHECK(rounded_up(0.1 + 0.2) == 0.3);
}

TEST_CASE("a chart's own run length comes with an allowance that leaves the others what they have") {
  const Settings settings = mill();
  const double level = settings.charts[0].level_run_length,
               warning = settings.comparisons[0].warning_run_length;
  CHECK(level == doctest::Approx(1825));
  Notice notice;
  notice.run_length = run_length(400, std::nullopt);
  notice.first = FirstRemedy::run_length;
  const auto advice = advice_on_notice(settings, {ChartIndex{1}, std::nullopt}, notice);
  REQUIRE(advice.size() == 1);
  REQUIRE(advice[0].changes.size() == 2);
  CHECK(advice[0].changes[0].key ==
        "check_standards.wheat-low.measurands.protein.charts.in_control_run_length");
  CHECK(advice[0].changes[0].value == "400");
  CHECK(advice[0].changes[0].now.empty());
  CHECK(advice[0].changes[1].key == "false_alerts_per_year");
  // Two charts with two scores each: 1,095 readings a year in 400 instead of in 1,825.
  const double allowance = number(advice[0].changes[1].value);
  CHECK(allowance == doctest::Approx(6 + 2 * 2 * (1095 / 400.0 - 1095 / 1825.0)).epsilon(0.005));
  Settings followed = settings;
  followed.charts[1].own_run_length = followed.charts[3].own_run_length = 400;
  const auto shares = share_alarm_budget(allowance, chart_entries(followed), comparison_entries(followed));
  CHECK_FALSE(shares.overspent);
  apply_budget(shares, followed);
  CHECK(followed.charts[0].level_run_length <= level);
  CHECK(followed.charts[0].level_run_length == doctest::Approx(level).epsilon(0.02));
  CHECK(followed.comparisons[0].warning_run_length == doctest::Approx(warning).epsilon(0.02));
  CHECK(followed.alarm_budget.expected_per_year == doctest::Approx(advice[0].false_alerts_per_year));
}

TEST_CASE("what costs least comes first, and what would not be valid is not advised") {
  const Settings settings = mill();
  Notice notice;
  notice.every = EveryRemedy{2h, {}};
  notice.run_length = run_length(150, 73);
  notice.sd = SdRemedy{0.5, {}};
  notice.first = FirstRemedy::every;
  const Stream chart{ChartIndex{0}, std::nullopt};
  auto advice = advice_on_notice(settings, chart, notice);
  REQUIRE(advice.size() == 4);
  CHECK(advice[0].kind == "every");
  CHECK(advice[0].changes[0].key == "check_standards.wheat-high.every");
  CHECK(advice[0].changes[0].value == "2h");
  CHECK(advice[0].changes[0].now == "8h");
  CHECK(advice[0].false_alerts_per_year == doctest::Approx(6));
  CHECK(advice[3].sd_factor == 0.5);
  // With so large an allowance the scatter test would have a run length below its window of 200 pairs.
  notice.run_length->false_alerts_per_year = 1000;
  advice = advice_on_notice(settings, chart, notice);
  CHECK(advice.size() == 3);
  notice.first = FirstRemedy::run_length;
  CHECK(advice_on_notice(settings, chart, notice)[0].kind == "in_control_run_length");
}

TEST_CASE("fewer false alerts: by the allowance, or by longer run lengths where those use it up") {
  Settings settings = mill();
  auto advice = advice_on_budget(settings, budget_for(settings, 2));
  REQUIRE(advice.size() == 1);
  REQUIRE(advice[0].changes.size() == 1);
  CHECK(advice[0].changes[0].key == "false_alerts_per_year");
  CHECK(advice[0].changes[0].value == "2");
  CHECK(advice[0].false_alerts_per_year == doctest::Approx(2));

  for (ChartSettings& chart : settings.charts) chart.own_run_length = 1000;  // 8.76 a year
  apply_budget(share_alarm_budget(12, chart_entries(settings), comparison_entries(settings)), settings);
  advice = advice_on_budget(settings, budget_for(settings, 4));
  REQUIRE(advice.size() == 1);
  REQUIRE(advice[0].changes.size() == 3);
  CHECK(advice[0].changes[0].now == "1000");
  CHECK(number(advice[0].changes[0].value) > 2700);  // an even share of 0.8 in two scores: 2,737.5 readings
  CHECK(advice[0].changes[2].value == "4");
  CHECK(advice[0].false_alerts_per_year <= 4);
}
