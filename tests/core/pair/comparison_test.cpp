#include "core/pair/comparison.hpp"

#include <cstring>

#include "core/base/rfc3339.hpp"
#include "tests/core/pair/harrow_mill.hpp"

using namespace agreed;
using namespace agreed::test;

TEST_CASE("a comparison without pairs shows what it waits for") {
  Mill mill(1);
  const ComparisonView view = mill.comparison.view();
  CHECK(view.verdict == Verdict::gathering);
  CHECK(view.verdict_reason == "too_few_pairs");
  CHECK(view.fit_reason == "too_few_pairs");
  CHECK_FALSE(view.fit);
  CHECK_FALSE(view.difference);
  CHECK(view.levels.size() == 2);
  CHECK(view.levels[0].allowable == 0.1);
  CHECK(view.pair_chart.state == PairChartState::learning);
  CHECK_FALSE(view.pair_chart.score);
  CHECK_FALSE(mill.comparison.last_at());
}

TEST_CASE("two analyzers that agree: agreement is shown, and nothing is called out") {
  Mill mill(2);
  mill.run(21);
  CHECK(mill.comparison.verdict() == Verdict::inconclusive);
  mill.run(1);
  CHECK(mill.comparison.verdict() == Verdict::agreement_shown);
  mill.run(378);
  CHECK(mill.comparison.verdict() == Verdict::agreement_shown);
  CHECK(mill.findings.empty());
  const ComparisonView view = mill.comparison.view();
  CHECK(view.pairs_total == 400);
  CHECK(view.window.pairs == 200);
  CHECK(view.last_agreement == mill.now);
  REQUIRE(view.fit);
  CHECK(std::abs(view.fit->slope - 1) < 4 * view.fit->se_slope);
  CHECK(view.fit->intercept_interval[0] < view.fit->intercept);
  CHECK(view.fit->analytic_se_slope / view.fit->se_slope == doctest::Approx(1).epsilon(0.3));
  CHECK(view.levels[1].verdict == Verdict::agreement_shown);
  CHECK(view.levels[1].single_result->share_within > 0.99);
  CHECK(view.scatter->variance_ratio == doctest::Approx(1).epsilon(0.3));
  CHECK(view.range->reliability_ratio > 0.99);
  CHECK(view.range->covers_levels);
  CHECK(view.pair_chart.state == PairChartState::stable);
  CHECK(view.bias_history.size() == 398);
  CHECK(view.pairs.size() == 400);
  CHECK_FALSE(view.pairs[199].in_window);
  CHECK(view.pairs[200].in_window);
}

TEST_CASE(
    "a large step: drifting is called with its start, then agreement is lost, and both end after repair") {
  Mill mill(3);
  mill.run(100);
  const Instant step_at = mill.now + std::chrono::hours(2);
  mill.run(30, 0.2);

  const auto drifting = mill.of(AlertKind::agreement_drifting);
  REQUIRE_FALSE(drifting.empty());
  CHECK(drifting.back().severity == Severity::critical);
  CHECK(drifting.back().subject.comparison == "protein");
  CHECK(drifting.back().started_at == step_at);
  CHECK(number_in(drifting.back(), "shift") == doctest::Approx(0.2).epsilon(0.3));
  CHECK(number_in(drifting.back(), "score") > number_in(drifting.back(), "limit"));
  const auto lost = mill.of(AlertKind::agreement_lost);
  REQUIRE(lost.size() == 1);
  CHECK(lost[0].severity == Severity::critical);
  CHECK(number_in(lost[0], "bias") == doctest::Approx(0.2).epsilon(0.3));
  CHECK(number_in(lost[0], "low") > 0.1);
  CHECK(number_in(lost[0], "allowable") == 0.1);
  CHECK(text_in(lost[0], "unit") == "g/100 g");
  CHECK(text_in(lost[0], "y") == "line2");
  CHECK(lost[0].started_at == step_at);
  CHECK(mill.comparison.verdict() == Verdict::disagreement_shown);
  std::vector<Finding> now;
  mill.comparison.conditions(now);
  CHECK(now.size() == 2);
  CHECK(mill.of(AlertKind::pair_outlier).empty());  // a step is admitted

  mill.findings.clear();
  mill.intervene();
  CHECK(mill.comparison.verdict() == Verdict::gathering);
  REQUIRE(mill.findings.size() == 1);
  CHECK(mill.findings[0].kind == AlertKind::agreement_drifting);
  CHECK_FALSE(mill.findings[0].holds);
  CHECK(mill.findings[0].resolved_reason == "intervention");
  mill.run(22);
  CHECK(mill.comparison.verdict() == Verdict::agreement_shown);
  REQUIRE(mill.findings.size() == 2);
  CHECK(mill.findings[1].kind == AlertKind::agreement_lost);
  CHECK_FALSE(mill.findings[1].holds);
  CHECK(mill.findings[1].resolved_reason == "agreement_shown");
  now.clear();
  mill.comparison.conditions(now);
  CHECK(now.empty());
}

TEST_CASE("a critical change restarts the window at its start and the verdict says so") {
  Mill mill(4);
  mill.run(100);
  const Instant step_at = mill.now + std::chrono::hours(2);
  while (mill.of(AlertKind::agreement_drifting).empty() ||
         mill.findings.back().severity != Severity::critical)
    mill.run(1, 0.15);
  const ComparisonView view = mill.comparison.view();
  CHECK(view.verdict == Verdict::inconclusive);
  CHECK(view.verdict_reason == "restarted_after_change");
  CHECK(view.window.since_intervention == step_at);
  CHECK(view.window.from == step_at);
  CHECK(view.pair_chart.state == PairChartState::unstable);
  CHECK(view.pair_chart.severity == Severity::critical);
  CHECK(view.pair_chart.started_at == step_at);
  CHECK(view.pairs_total > view.window.pairs);
}

TEST_CASE("a change that does no harm is critical until agreement is shown again") {
  Mill mill(5);
  mill.run(150);
  mill.run(60, 0.06);
  const auto drifting = mill.of(AlertKind::agreement_drifting);
  REQUIRE(drifting.size() >= 2);
  CHECK(drifting[drifting.size() - 2].severity == Severity::critical);
  CHECK_FALSE(drifting.back().holds);
  CHECK(drifting.back().resolved_reason == "agreement_shown");
  CHECK(mill.of(AlertKind::agreement_lost).empty());
  CHECK(mill.comparison.verdict() == Verdict::agreement_shown);
}

TEST_CASE("one gross pair is set aside, told once, and moves nothing") {
  Mill mill(6);
  mill.run(60);
  const double slope = mill.comparison.view().fit->slope;
  mill.add({12, 14});
  CHECK(mill.comparison.view().fit->slope == slope);
  CHECK_FALSE(mill.comparison.view().pairs.back().in_window);
  CHECK_FALSE(mill.comparison.view().pairs.back().outlier);
  const Instant measured_at = mill.now;
  mill.run(1);
  CHECK(mill.findings.empty());
  mill.run(1);
  REQUIRE(mill.findings.size() == 1);
  const Finding& told = mill.findings[0];
  CHECK(told.kind == AlertKind::pair_outlier);
  CHECK(told.severity == Severity::notice);
  CHECK(told.holds);
  CHECK(text_in(told, "sample") == "S-61");
  CHECK(number_in(told, "y_value") == 14);
  CHECK(number_in(told, "residual") > 10);
  CHECK(text_in(told, "measured_at") == to_rfc3339(measured_at));
  CHECK(mill.comparison.set_aside() == std::vector<std::string>{"S-61"});
  mill.run(50);
  CHECK(mill.findings.size() == 1);
  const ComparisonView view = mill.comparison.view();
  REQUIRE(view.outliers.size() == 1);
  CHECK(view.outliers[0].sample == "S-61");
  CHECK(view.pairs[60].outlier);
  CHECK(view.window.pairs == 112);
  std::vector<Finding> now;
  mill.comparison.conditions(now);
  CHECK(now.empty());
}

TEST_CASE("with outliers kept the gross pair goes into the line") {
  Settings settings = harrow_mill();
  settings.comparisons[0].set_outliers_aside = false;
  Mill mill(6, settings);
  mill.run(60);
  mill.add({12, 14});
  mill.run(5);
  CHECK(mill.of(AlertKind::pair_outlier).empty());
  CHECK(mill.comparison.view().window.pairs == mill.comparison.view().pair_chart.pairs);
  CHECK(mill.comparison.view().scatter->variance_ratio > 10);
}

TEST_CASE("a step with one near pair between is admitted in its order") {
  Mill mill(7);
  mill.run(60);
  mill.add({12, 12.5});
  mill.run(1);
  mill.add({12, 12.5});
  CHECK(mill.comparison.set_aside().empty());
  CHECK(mill.of(AlertKind::pair_outlier).empty());
  const ComparisonView view = mill.comparison.view();
  for (std::size_t i = 60; i < 63; ++i) CHECK(view.pairs[i].in_window);
}

TEST_CASE("a pair still held at an intervention is set aside and told") {
  Mill mill(8);
  mill.run(60);
  mill.add({12, 14});
  mill.intervene();
  REQUIRE(mill.findings.size() == 1);
  CHECK(mill.findings[0].kind == AlertKind::pair_outlier);
  CHECK(mill.findings[0].at == mill.now);
}

TEST_CASE("an unknown error ratio is a reason, and what was found stays") {
  Mill mill(9);
  mill.run(100);
  mill.run(40, 0.25);
  REQUIRE(mill.of(AlertKind::agreement_lost).size() == 1);
  mill.ratio = ErrorRatio{};
  mill.ratio.reason = "repeatability_not_known";
  mill.run(5, 0.25);
  const ComparisonView view = mill.comparison.view();
  CHECK(view.verdict == Verdict::gathering);
  CHECK(view.verdict_reason == "repeatability_not_known");
  CHECK(view.fit_reason == "repeatability_not_known");
  CHECK(view.error.reason == "repeatability_not_known");
  CHECK_FALSE(view.error.lambda);
  CHECK(view.difference);
  CHECK(view.levels.size() == 2);
  CHECK(view.levels[0].reason == "repeatability_not_known");
  CHECK_FALSE(view.pair_chart.score);
  std::vector<Finding> now;
  mill.comparison.conditions(now);
  CHECK(now.size() == 2);
  mill.ratio = equal_errors();
  mill.run(1, 0.25);
  CHECK(mill.comparison.verdict() == Verdict::inconclusive);
}

TEST_CASE("without decision levels or an allowable difference the verdict says so and the fit is shown") {
  Settings settings = harrow_mill();
  settings.measurands[0].decision_levels.clear();
  Mill no_levels(10, settings);
  CHECK(no_levels.comparison.view().verdict_reason == "no_decision_levels");
  no_levels.run(50);
  CHECK(no_levels.comparison.view().verdict_reason == "no_decision_levels");
  CHECK(no_levels.comparison.view().fit);
  no_levels.run(20, 0.2);  // a change is told all the same
  CHECK_FALSE(no_levels.of(AlertKind::agreement_drifting).empty());
  CHECK(no_levels.comparison.verdict() == Verdict::gathering);

  settings = harrow_mill();
  settings.measurands[0].allowable.reset();
  Mill no_allowable(10, settings);
  no_allowable.run(50);
  const ComparisonView view = no_allowable.comparison.view();
  CHECK(view.verdict == Verdict::gathering);
  CHECK(view.verdict_reason == "no_allowable_difference");
  CHECK(view.levels[0].bias);
  CHECK_FALSE(view.levels[0].allowable);
  CHECK(view.levels[0].reason == "no_allowable_difference");
}

TEST_CASE("a decision level outside the range is not covered and keeps agreement back") {
  Settings settings = harrow_mill();
  settings.measurands[0].decision_levels = {10.5, 16.5};
  Mill mill(11, settings);
  mill.run(60);
  const ComparisonView view = mill.comparison.view();
  CHECK(view.verdict == Verdict::inconclusive);
  CHECK(view.verdict_reason == "not_covered");
  CHECK(view.levels[0].verdict == Verdict::agreement_shown);
  CHECK(view.levels[1].verdict == Verdict::inconclusive);
  CHECK(view.levels[1].reason == "not_covered");
  CHECK_FALSE(view.range->covers_levels);
}

TEST_CASE("the window's age counts back from the newest pair") {
  Settings settings = harrow_mill();
  settings.comparisons[0].window_age = std::chrono::hours(100);
  Mill mill(12, settings);
  mill.run(80);
  CHECK(mill.comparison.view().window.pairs == 51);
  mill.now += std::chrono::hours(1000);
  mill.run(1);
  CHECK(mill.comparison.view().window.pairs == 1);
  CHECK(mill.comparison.verdict() == Verdict::gathering);
  mill.run(40);
  CHECK(mill.comparison.verdict() == Verdict::agreement_shown);
}

TEST_CASE("replicates divide the error variances") {
  Mill single(13), averaged(13);
  for (int i = 0; i < 50; ++i) {
    const Point p = single.plant(single.random);
    single.add(p);
    averaged.now += std::chrono::hours(2);
    Pair pair{"S", averaged.now, p.x, p.y, 4, 1};
    averaged.comparison.add(pair, averaged.ratio, averaged.findings);
  }
  // Four replicates of x: lambda of the means is a quarter, the line nearer to least squares on x.
  ErrorRatio quarter = equal_errors();
  quarter.lambda = quarter.low = quarter.high = 0.25;
  Mill by_hand(13);
  by_hand.ratio = quarter;
  by_hand.run(50);
  CHECK_CLOSE(averaged.comparison.view().fit->slope, by_hand.comparison.view().fit->slope, 1e-12);
  CHECK(averaged.comparison.view().fit->slope < single.comparison.view().fit->slope);
  CHECK(averaged.comparison.view().scatter->expected_sd < single.comparison.view().scatter->expected_sd);
}

TEST_CASE("what is remembered is bounded, and a week's gap or ties in time do no harm") {
  Settings settings = harrow_mill();
  settings.comparisons[0].window_pairs = 40;
  settings.comparisons[0].split_memory = 50;
  Mill mill(14, settings);
  for (int i = 0; i < 1500; ++i) {
    if (i % 3 == 0) mill.now -= std::chrono::hours(2);
    if (i % 100 == 0) mill.now += std::chrono::hours(200);
    mill.run(1);
  }
  const ComparisonView view = mill.comparison.view();
  CHECK(view.pairs.size() == 500);
  CHECK(view.bias_history.size() == 500);
  CHECK(view.window.pairs <= 40);
  CHECK(view.pairs_total == 1500);
}

namespace {
// Every number of a view and of findings, as bits.
void append(std::string& bits, double value) {
  char raw[sizeof value];
  std::memcpy(raw, &value, sizeof value);
  bits.append(raw, sizeof value);
}

std::string bits_of(const Mill& mill) {
  const ComparisonView view = mill.comparison.view();
  std::string bits = std::string(to_string(view.verdict)) + view.verdict_reason;
  for (const Finding& finding : mill.findings) {
    bits += to_string(finding.kind) + to_rfc3339(finding.at);
    for (const auto& [name, value] : finding.details)
      if (const double* number = std::get_if<double>(&value)) append(bits, *number);
  }
  if (view.fit)
    for (const double v : {view.fit->slope, view.fit->intercept, view.fit->se_slope, view.fit->se_intercept,
                           view.fit->analytic_se_slope, view.fit->identity_p})
      append(bits, v);
  for (const BiasPoint& point : view.bias_history)
    for (const auto& level : point.levels)
      for (const double v : level) append(bits, v);
  for (const PairView& pair : view.pairs) append(bits, pair.residual.value_or(-99));
  append(bits, view.pair_chart.score.value_or(-99));
  return bits;
}

void live(Mill& mill, bool look_often) {
  for (int i = 0; i < 700; ++i) {
    if (i == 300) mill.intervene();
    if (i % 97 == 50) mill.add({12, 13});
    mill.run(1, i > 500 ? 0.08 : 0);
    if (look_often) (void)mill.comparison.view();
  }
}
}  // namespace

TEST_CASE("the same events give the same bits, whoever looks in between") {
  Mill once(15), again(15);
  live(once, false);
  live(again, true);
  CHECK(once.findings.size() > 5);
  CHECK(bits_of(once) == bits_of(again));
}

TEST_CASE("a copy goes on as the original does") {
  Mill mill(16);
  mill.run(230);
  Comparison copy = mill.comparison;
  Mill other(16);
  other.run(230);
  other.comparison = copy;
  mill.run(100, 0.05);
  other.run(100, 0.05);
  CHECK(bits_of(mill) == bits_of(other));
}
