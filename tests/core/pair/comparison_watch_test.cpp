// What is watched over a whole window or a long time: scatter, curvature, unproven agreement, an established
// line.
#include "core/base/rfc3339.hpp"
#include "tests/core/pair/harrow_mill.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
Settings with_window(int pairs) {
  Settings settings = harrow_mill();
  settings.comparisons[0].window_pairs = pairs;
  return settings;
}

// Samples that differ between the analyzers: one more error on y.
void run_scattered(Mill& mill, int n, double sd) {
  std::normal_distribution<double> error(0, sd);
  for (int i = 0; i < n; ++i) {
    Point p = mill.plant(mill.random);
    p.y += error(mill.random);
    mill.add(p);
  }
}

std::vector<Finding> conditions_of(const Mill& mill) {
  std::vector<Finding> now;
  mill.comparison.conditions(now);
  return now;
}

bool has_warning(const Mill& mill, const char* code) {
  const auto warnings = mill.comparison.view().warnings;
  return std::find(warnings.begin(), warnings.end(), code) != warnings.end();
}
}  // namespace

TEST_CASE(
    "more scatter than repeatability explains is told once a window, and ends when it is explained again") {
  Settings settings = with_window(50);
  settings.comparisons[0].set_outliers_aside = false;
  settings.comparisons[0].warning_run_length = 1e9;
  Mill mill(81, settings);
  run_scattered(mill, 49, 0.05);
  CHECK(mill.of(AlertKind::sample_scatter).empty());
  run_scattered(mill, 1, 0.05);
  const auto found = mill.of(AlertKind::sample_scatter);
  REQUIRE(found.size() == 1);
  CHECK(found[0].holds);
  CHECK(found[0].severity == Severity::notice);
  CHECK(number_in(found[0], "observed_sd") == doctest::Approx(std::hypot(0.05, 0.02, 0.02)).epsilon(0.2));
  CHECK(number_in(found[0], "expected_sd") == doctest::Approx(std::hypot(0.02, 0.02)).epsilon(0.01));
  CHECK_CLOSE(number_in(found[0], "sd_ratio"),
              number_in(found[0], "observed_sd") / number_in(found[0], "expected_sd"), 1e-12);
  CHECK(number_in(found[0], "p") < 50.0 / 30000);
  CHECK(number_in(found[0], "pairs") == 50);
  CHECK(mill.comparison.view().scatter->excess);
  REQUIRE(conditions_of(mill).size() == 1);
  CHECK(conditions_of(mill)[0].kind == AlertKind::sample_scatter);

  mill.findings.clear();
  mill.run(49);  // the next test comes with the renewed window
  CHECK(mill.of(AlertKind::sample_scatter).empty());
  mill.run(1);
  REQUIRE(mill.of(AlertKind::sample_scatter).size() == 1);
  CHECK_FALSE(mill.findings.back().holds);
  CHECK(mill.findings.back().resolved_reason == "scatter_explained");
  CHECK(conditions_of(mill).empty());
}

TEST_CASE("an intervention ends what was found of the scatter, and without known errors nothing is found") {
  Settings settings = with_window(50);
  settings.comparisons[0].set_outliers_aside = false;
  Mill mill(82, settings);
  run_scattered(mill, 50, 0.05);
  REQUIRE(mill.of(AlertKind::sample_scatter).size() == 1);
  mill.intervene();
  REQUIRE(mill.of(AlertKind::sample_scatter).size() == 2);
  CHECK(mill.of(AlertKind::sample_scatter)[1].resolved_reason == "intervention");
  Mill bare(82, settings);
  bare.ratio.variances_known = false;
  run_scattered(bare, 50, 0.05);
  CHECK(bare.of(AlertKind::sample_scatter).empty());
}

TEST_CASE("a curved relation is warned of once the window is full") {
  Mill mill(83, with_window(60));
  const auto add = [&](int n) {
    for (int i = 0; i < n; ++i) {
      Point p = mill.plant(mill.random);
      p.y += 0.01 * (p.x - 12) * (p.x - 12);
      mill.add(p);
    }
  };
  add(59);
  CHECK_FALSE(has_warning(mill, "curved"));
  add(1);
  CHECK(has_warning(mill, "curved"));
  mill.intervene();
  mill.run(60);
  CHECK_FALSE(has_warning(mill, "curved"));
}

TEST_CASE(
    "unproven for longer than prove_within is told with the pairs that would decide it, and again as long "
    "after") {
  Settings settings = harrow_mill();
  settings.measurands[0].allowable =
      AllowableDifference{0.008, std::nullopt};  // too little for the first pairs
  settings.comparisons[0].prove_within = std::chrono::hours(50);
  Mill mill(84, settings);
  mill.run(20);  // inconclusive from the 20th pair
  CHECK(mill.comparison.verdict() == Verdict::inconclusive);
  const Instant since = mill.now;
  mill.run(25);
  CHECK(mill.now == since + std::chrono::hours(50));
  CHECK(mill.of(AlertKind::agreement_unproven).empty());  // exactly as long is not longer
  CHECK_FALSE(mill.comparison.view().proof->overdue);
  mill.run(1);
  const auto found = mill.of(AlertKind::agreement_unproven);
  REQUIRE(found.size() == 1);
  CHECK(found[0].severity == Severity::notice);
  CHECK(text_in(found[0], "inconclusive_since") == to_rfc3339(since));
  CHECK(number_in(found[0], "pairs") == 46);
  CHECK(number_in(found[0], "allowable") == 0.008);
  const ComparisonView view = mill.comparison.view();
  REQUIRE(view.proof);
  CHECK(view.proof->overdue);
  CHECK(view.proof->residual_sd == number_in(found[0], "residual_sd"));
  REQUIRE(view.proof->more_pairs);
  CHECK(number_in(found[0], "pairs_needed") == *view.proof->more_pairs);
  CHECK(number_in(found[0], "sd_needed") < number_in(found[0], "residual_sd"));
  CHECK(conditions_of(mill).size() == 1);

  int pairs = 0;
  while (mill.comparison.verdict() == Verdict::inconclusive && ++pairs < 2000) mill.run(1);
  CHECK(mill.comparison.verdict() == Verdict::agreement_shown);
  const auto all = mill.of(AlertKind::agreement_unproven);
  CHECK_FALSE(all.back().holds);
  CHECK(all.back().resolved_reason == "agreement_shown");
  CHECK(static_cast<int>(all.size()) == 2 + (pairs - 1) / 26);  // renewed every 26th pair, then ended
  CHECK_FALSE(mill.comparison.view().proof);
  CHECK(conditions_of(mill).empty());
}

TEST_CASE("without prove_within, or before enough pairs came, nothing is called unproven") {
  Settings settings = harrow_mill();
  settings.measurands[0].allowable = AllowableDifference{0.001, std::nullopt};
  Mill never(85, settings);
  never.run(300);
  CHECK(never.of(AlertKind::agreement_unproven).empty());
  settings.comparisons[0].prove_within = std::chrono::hours(1);
  settings.comparisons[0].least_pairs = 30;
  Mill early(85, settings);
  early.run(30);
  CHECK(early.of(AlertKind::agreement_unproven).empty());
  early.run(1);
  CHECK(early.of(AlertKind::agreement_unproven).size() == 1);
  early.intervene();
  CHECK(early.findings.back().resolved_reason == "intervention");
}

TEST_CASE(
    "pairs off an established line are told; the verdict speaks from the start of it and nothing is told "
    "twice") {
  Settings settings = harrow_mill();
  settings.comparisons[0].relation = EstablishedLine{};
  Mill mill(86, settings);
  mill.plant.intercept = 0.05;
  mill.run(60);
  const auto drifting = mill.of(AlertKind::agreement_drifting);
  REQUIRE_FALSE(drifting.empty());
  CHECK(drifting.back().severity == Severity::critical);
  CHECK(number_in(drifting.back(), "relation_slope") == 1);
  CHECK(number_in(drifting.back(), "shift") == doctest::Approx(0.05).epsilon(0.4));
  // A warning, then critical: a lasting difference is not told pair by pair.
  CHECK(std::count_if(drifting.begin(), drifting.end(), [](const Finding& f) { return f.holds; }) <= 2);
  const ComparisonView view = mill.comparison.view();
  CHECK_FALSE(view.pair_chart.against_established_line);
  CHECK(view.verdict == Verdict::agreement_shown);  // 0.05 is within what is allowable
  CHECK(conditions_of(mill).empty());               // so the change is resolved
  mill.intervene();
  CHECK(mill.comparison.view().pair_chart.against_established_line);
  mill.run(60);
  CHECK(mill.of(AlertKind::agreement_drifting).size() > drifting.size());

  Mill without(86);
  without.plant.intercept = 0.05;
  without.run(60);
  CHECK(without.of(AlertKind::agreement_drifting).empty());
}

TEST_CASE("agreement that was lost stays named while further changes restart the verdict") {
  Mill mill(87);
  mill.run(100);
  CHECK_FALSE(mill.comparison.view().agreement_lost);
  int pairs = 0;
  double shift = 0;
  while (mill.of(AlertKind::agreement_lost).empty() && ++pairs < 300) mill.run(1, shift += 0.01);
  REQUIRE(pairs < 300);
  const Instant lost = mill.of(AlertKind::agreement_lost)[0].at;
  bool undecided = false;
  for (int i = 0; i < 60; ++i) {
    mill.run(1, shift += 0.02);
    const ComparisonView view = mill.comparison.view();
    CHECK(view.agreement_lost);
    if (view.verdict == Verdict::inconclusive) undecided = true;
  }
  CHECK(undecided);
  CHECK(mill.comparison.view().agreement_lost >= lost);
  mill.intervene();
  CHECK(mill.comparison.view().agreement_lost);
  mill.run(30);
  CHECK(mill.comparison.verdict() == Verdict::agreement_shown);
  CHECK_FALSE(mill.comparison.view().agreement_lost);
}
