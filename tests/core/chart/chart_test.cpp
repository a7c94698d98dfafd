// The fold: what a chart tells and shows over time.
#include "core/chart/chart.hpp"

#include <doctest/doctest.h>

#include "core/base/distributions.hpp"
#include "core/chart/level_score.hpp"
#include "core/chart/run_length.hpp"
#include "tests/core/chart/scenario.hpp"

using namespace agreed;
using namespace agreed::test;

TEST_CASE("a chart without readings is learning and has nothing to say") {
  const Settings settings = mill(1800);
  const Chart chart(settings, {0});
  const ChartView view = chart.view();
  CHECK(view.state == ChartState::learning);
  CHECK(view.baseline.readings == 0);
  CHECK_FALSE(view.baseline.center);
  CHECK_FALSE(view.change.score);
  CHECK(view.lot == "2026-A");
  CHECK_FALSE(chart.repeatability().known());
  CHECK_FALSE(chart.last_at());
  REQUIRE(chart.repeatability_at(hour(5)));
  CHECK_FALSE(chart.repeatability_at(hour(5))->known());
}

TEST_CASE(
    "scores begin at the fifth and seventh reading, limits at the fifth, learning ends at the thirtieth") {
  const Settings settings = mill(1800);
  Fed fed(settings);
  Readings next(21);
  feed(fed, next, 29);
  CHECK(fed.chart.state() == ChartState::learning);
  feed(fed, next, 1);
  CHECK(fed.chart.state() == ChartState::stable);
  const ChartView view = fed.chart.view();
  CHECK_FALSE(view.points[3].score);
  CHECK(view.points[4].score);
  CHECK_FALSE(view.points[3].upper);
  CHECK(view.points[4].upper);
  CHECK_FALSE(view.points[5].precision_score);
  CHECK(view.points[6].precision_score);
  CHECK(view.warnings.empty());
}

TEST_CASE("points show the scores and limits of the stretch as it stood, by definition") {
  for (const int memory : {25, 400}) {
    const Settings settings = mill(1e6, memory);
    Fed fed(settings);
    Readings next(22);
    std::vector<double> values;
    for (int i = 0; i < 620; ++i) {
      values.push_back(10 + next());
      fed.read(values.back());
    }
    REQUIRE(fed.findings.empty());
    const ChartView view = fed.chart.view();
    REQUIRE(view.points.size() == 500);
    const double h = limit_for(Score::level, 1e6).h;
    for (std::size_t i = 0; i < 500; i += 7) {
      const std::size_t n = i + 121;
      const std::vector<double> so_far(values.begin(), values.begin() + static_cast<std::ptrdiff_t>(n));
      const ChartPoint& point = view.points[i];
      const auto kept = static_cast<std::size_t>(memory);
      const double t = level_by_definition(so_far, 0, kept).value;
      CHECK(*point.score == doctest::Approx(normal_score_of_t(t, static_cast<double>(n - 2))).epsilon(1e-8));
      CHECK(*point.precision_score ==
            doctest::Approx(precision_by_definition(so_far, 0, kept).value).epsilon(1e-8));
      const Moments before(values, 0, n - 1);
      const double sd = std::sqrt(static_cast<double>(before.squares) / static_cast<double>(n - 2));
      const double half = t_of_normal_score(h, static_cast<double>(n - 2)) * sd *
                          std::sqrt(1 + 1 / static_cast<double>(n - 1));
      CHECK(*point.upper == doctest::Approx(static_cast<double>(before.mean) + half).epsilon(1e-8));
      CHECK(*point.lower == doctest::Approx(static_cast<double>(before.mean) - half).epsilon(1e-8));
    }
  }
}

TEST_CASE("a step that stays is told once, with its start, and stays open") {
  Scenario s(23);
  feed(s.fed, s.next, 60, 13);
  REQUIRE_FALSE(s.fed.findings.empty());
  const Finding& told = s.fed.findings.front();
  CHECK(told.kind == AlertKind::check_standard_unstable);
  CHECK(told.holds);
  CHECK(told.severity == Severity::warning);
  CHECK(told.subject == Subject{"line1", "wheat-low", "protein", "", ""});
  for (const Finding& finding : s.fed.findings) CHECK(finding.holds);
  CHECK(s.fed.findings.size() <= 2);
  CHECK(s.fed.unstable());

  std::vector<Finding> now;
  s.fed.chart.conditions(now);
  REQUIRE(now.size() == 1);
  CHECK(text_of(now[0], "pattern") == "shift");
  CHECK(*now[0].started_at == hour(101));
  CHECK(now[0].started_between->first <= hour(101));
  CHECK(now[0].started_between->last >= hour(101));
  CHECK(number_of(now[0], "shift") == doctest::Approx(3).epsilon(0.15));
  CHECK(number_of(now[0], "readings_since") == doctest::Approx(60));
  CHECK(text_of(now[0], "unit") == "g/100 g");
  const ChartView view = s.fed.chart.view();
  CHECK(view.pattern == "shift");
  CHECK(*view.change.started_at == hour(101));
  // What is suspected is not learned from.
  CHECK(*view.baseline.center == doctest::Approx(10).epsilon(0.05));
  int signals = 0;
  for (const ChartPoint& point : view.points) signals += !point.signals.empty();
  CHECK(signals == 1);
}

TEST_CASE("a step that ends after 20 readings closes, and is set aside") {
  Scenario s(24);
  feed(s.fed, s.next, 20, 13);
  CHECK(s.fed.unstable());
  feed(s.fed, s.next, 15);
  CHECK_FALSE(s.fed.unstable());
  const Finding& last = s.fed.findings.back();
  CHECK_FALSE(last.holds);
  CHECK(last.resolved_reason == "back_to_normal");
  CHECK(last.at <= hour(130));
  CHECK(number_of(last, "set_aside") == doctest::Approx(20).epsilon(0.11));
  const ChartView view = s.fed.chart.view();
  CHECK(static_cast<double>(view.baseline.set_aside) == doctest::Approx(number_of(last, "set_aside")));
  CHECK(view.baseline.readings + view.baseline.set_aside == 135);
  CHECK(view.points[110].set_aside);
  CHECK_FALSE(view.points[90].set_aside);
  CHECK_FALSE(view.points[133].set_aside);
  CHECK(*view.change.score < 3.9);
}

TEST_CASE("a single reading far off closes after three more and alone is set aside") {
  Scenario s(25);
  s.fed.read(22);
  REQUIRE(s.fed.findings.size() == 1);
  CHECK(text_of(s.fed.findings[0], "pattern") == "single_reading");
  CHECK(number_of(s.fed.findings[0], "value") == doctest::Approx(22));
  CHECK(number_of(s.fed.findings[0], "limit_upper") < 16);
  // Two readings with a gross one among them also scatter more; that opens no second alert.
  const auto signals = s.fed.chart.view().points.back().signals;
  REQUIRE(signals.size() == 2);
  CHECK(signals[0] == ChartSignal::single_high);
  CHECK(signals[1] == ChartSignal::scatter_up);
  feed(s.fed, s.next, 2);
  CHECK(s.fed.unstable());
  feed(s.fed, s.next, 1);
  CHECK_FALSE(s.fed.unstable());
  CHECK(number_of(s.fed.findings.back(), "set_aside") == doctest::Approx(1));
  CHECK(s.fed.chart.view().points[100].set_aside);
  CHECK(*s.fed.chart.view().baseline.sd < 1.3);
}

TEST_CASE("an alert whose start is older than the readings held still ends, is set aside and counts right") {
  for (const double size : {2.0, 4.0, 1e9}) {
    const Settings settings = mill(1800, 20);
    Fed fed(settings);
    Readings next(36);
    feed(fed, next, 60);
    REQUIRE(fed.findings.empty());
    feed(fed, next, 50, 10 + size);
    CAPTURE(size);
    REQUIRE(fed.unstable());
    feed(fed, next, 19);
    CHECK_FALSE(fed.unstable());
    const ChartView view = fed.chart.view();
    CHECK(view.baseline.readings + view.baseline.set_aside == 129);
    CHECK(view.baseline.set_aside >= 48);
    CHECK(view.baseline.set_aside <= 52);
    CHECK(*view.baseline.center == doctest::Approx(10).epsilon(0.05));
    CHECK(*view.baseline.sd == doctest::Approx(1).epsilon(0.3));
    CHECK(*view.baseline.sigma == doctest::Approx(1).epsilon(0.3));
    int marked = 0;
    for (const ChartPoint& point : view.points) marked += point.set_aside;
    CHECK(marked == view.baseline.set_aside);
    feed(fed, next, 40);
    CHECK(std::isfinite(*fed.chart.view().change.score));
    CHECK(std::isfinite(*fed.chart.view().precision.score));
  }
}

TEST_CASE("scores after a set-aside leave it out") {
  Scenario s(25);
  std::vector<double> counted;
  for (const ChartPoint& point : s.fed.chart.view().points) counted.push_back(point.value);
  s.fed.read(22);
  feed(s.fed, s.next, 60);
  const ChartView view = s.fed.chart.view();
  for (std::size_t i = 101; i < view.points.size(); ++i) {
    counted.push_back(view.points[i].value);
    if (i < 104) continue;
    const double t = level_by_definition(counted, 0).value;
    CHECK(*view.points[i].score ==
          doctest::Approx(normal_score_of_t(t, static_cast<double>(counted.size() - 2))).epsilon(1e-8));
  }
}

TEST_CASE("scatter that grows fourfold and stays is told as scatter") {
  Scenario s(26);
  feed(s.fed, s.next, 80, 10, 4);
  CHECK(s.fed.unstable());
  CHECK(s.fed.chart.view().pattern == "scatter");
  std::vector<Finding> now;
  s.fed.chart.conditions(now);
  REQUIRE(now.size() == 1);
  CHECK(number_of(now[0], "ratio_of_sd") == doctest::Approx(4).epsilon(0.3));
  CHECK(s.fed.chart.view().precision.ratio_of_sd > 2.5);
}

TEST_CASE("a pattern or start that changes by the tenth reading after the signal is told once more") {
  int updated = 0;
  for (std::uint64_t seed = 40; seed < 70; ++seed) {
    const Settings settings = mill(1800);
    Fed fed(settings);
    Readings next(seed);
    feed(fed, next, 60);
    if (!fed.findings.empty()) continue;
    feed(fed, next, 40, 10, 4);
    if (fed.findings.size() < 2 || !fed.findings[1].holds) continue;
    ++updated;
    CHECK(fed.findings[1].at - fed.findings[0].at == std::chrono::hours(10));
    const bool other = text_of(fed.findings[0], "pattern") != text_of(fed.findings[1], "pattern") ||
                       fed.findings[0].started_at != fed.findings[1].started_at;
    CHECK(other);
  }
  CHECK(updated > 5);
}

TEST_CASE("a small shift is a notice, by half an sd, the allowable difference or the setting") {
  const auto severity = [](auto change) {
    Settings settings = mill(300);
    change(settings);
    Fed fed(settings);
    // An exact pattern: sd about 1, then a small shift that lasts until it is seen.
    for (int i = 0; i < 200; ++i) fed.read(i % 2 == 0 ? 9 : 11);
    for (int i = 0; i < 400 && fed.findings.empty(); ++i) fed.read(i % 2 == 0 ? 9.45 : 11.45);
    REQUIRE_FALSE(fed.findings.empty());
    return fed.findings[0].severity;
  };
  CHECK(severity([](Settings&) {}) == Severity::notice);
  CHECK(severity([](Settings& s) { s.charts[0].smallest_shift = 0.1; }) == Severity::warning);
  CHECK(severity([](Settings& s) {
          s.measurands[0].allowable = AllowableDifference{0.4, {}};
        }) == Severity::warning);
  CHECK(severity([](Settings& s) {
          s.measurands[0].allowable = AllowableDifference{{}, 40};
        }) == Severity::notice);
}

TEST_CASE("repeatability: known from five readings, its own from ten moving ranges, the old one until then") {
  const Settings settings = mill(1800);
  Fed fed(settings);
  Readings next(32);
  feed(fed, next, 4);
  CHECK_FALSE(fed.chart.repeatability().known());
  feed(fed, next, 36);
  const Repeatability first = fed.chart.repeatability();
  CHECK(first.variance == doctest::Approx(1).epsilon(0.5));
  CHECK(first.at == hour(40));
  CHECK(first.mean == doctest::Approx(10).epsilon(0.1));
  fed.intervene(InterventionKind::repaired);
  feed(fed, next, 10, 20, 0.1);
  CHECK(fed.chart.repeatability().variance == doctest::Approx(first.variance));
  CHECK(fed.chart.repeatability().at == hour(50));
  feed(fed, next, 1, 20, 0.1);
  const Repeatability second = fed.chart.repeatability();
  CHECK(second.variance < 0.05);
  CHECK(second.mean == doctest::Approx(20).epsilon(0.1));
  CHECK(second.degrees_of_freedom < first.degrees_of_freedom);

  CHECK(fed.chart.repeatability_at(hour(40))->variance == doctest::Approx(first.variance));
  CHECK(fed.chart.repeatability_at(hour(40) + std::chrono::minutes(30))->at == hour(40));
  CHECK_FALSE(fed.chart.repeatability_at(hour(3))->known());
  feed(fed, next, 500, 20, 0.1);
  CHECK_FALSE(fed.chart.repeatability_at(hour(3)));
  CHECK(fed.chart.repeatability_at(hour(500)));
}

TEST_CASE("a gross reading does not reach repeatability") {
  Scenario s(33);
  const double before = s.fed.chart.repeatability().variance;
  s.fed.read(1000);
  CHECK(s.fed.chart.repeatability().variance == doctest::Approx(before));
  feed(s.fed, s.next, 10);
  CHECK_FALSE(s.fed.unstable());
  CHECK(s.fed.chart.repeatability().variance == doctest::Approx(before).epsilon(0.3));
}

TEST_CASE("warnings: short baseline, coarse resolution, serial correlation") {
  Settings settings = mill(1e9);
  settings.measurands[0].decimals = 0;
  Fed coarse(settings);
  for (int i = 0; i < 20; ++i) coarse.read(i % 5 == 0 ? 11 : 10);
  CHECK(coarse.chart.view().warnings == std::vector<std::string>{"baseline_short", "resolution_too_coarse"});

  const Settings fine = mill(1e9);
  Fed linked(fine);
  Readings next(34);
  double state = 0;
  for (int i = 0; i < 200; ++i) linked.read(state = 0.5 * state + next());
  CHECK(linked.chart.view().warnings == std::vector<std::string>{"serial_correlation"});
}

TEST_CASE("the same events give the same bits, also by way of a copy") {
  const Settings settings = mill(300);
  const auto play = [&](Fed& fed, int from, int to) {
    Readings next(35);
    for (int i = 0; i < to; ++i) {
      const double value = 10 + next() + (i > 300 && i < 340 ? 3 : 0) + (i == 500 ? 9 : 0);
      if (i < from) continue;
      if (i == 700) fed.intervene(InterventionKind::consumable_changed);
      fed.read(value);
    }
  };
  Fed first(settings), second(settings);
  play(first, 0, 1200);
  play(second, 0, 501);
  const Fed copy = second;
  play(second, 501, 1200);
  Fed third = copy;
  play(third, 501, 1200);
  CHECK(first.findings.size() > 4);
  CHECK(dump(second.chart.view()) == dump(first.chart.view()));
  CHECK(dump(third.chart.view()) == dump(first.chart.view()));
  CHECK(third.findings.size() == first.findings.size());
}

TEST_CASE("what comes out of order or is no number is refused by name") {
  const Settings settings = mill(1800);
  Fed fed(settings);
  fed.read(10);
  std::vector<Finding> findings;
  CHECK_THROWS_AS(fed.chart.add(CheckReading{hour(0), {0}, {1}, {0}, 0, 10}, findings),
                  std::invalid_argument);
  CHECK_THROWS_AS(fed.chart.add(CheckReading{hour(9), {0}, {1}, {0}, 0, std::nan("")}, findings),
                  std::invalid_argument);
  CHECK(fed.chart.view().points.size() == 1);
}
