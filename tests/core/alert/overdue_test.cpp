// Hours of rest, what is overdue, and what is held while somebody works on an analyzer. No clock: the time is
// given.
#include <algorithm>
#include <random>

#include <doctest/doctest.h>

#include "core/alert/alert_book.hpp"
#include "tests/core/alert/harrow_mill.hpp"

using namespace agreed;
using namespace agreed::test;
using namespace std::chrono_literals;

namespace {
constexpr AnalyzerIndex kLine1{0}, kLine2{1};
constexpr StandardIndex kHigh{0}, kLow{1};
constexpr MeasurandIndex kProtein{1};
constexpr ComparisonIndex kMoisture{0}, kProteinPairs{1};

QuietHours hours(std::array<bool, 7> days, std::chrono::minutes from, std::chrono::minutes to) {
  return {days, from, to};
}
constexpr std::array<bool, 7> kEveryDay{true, true, true, true, true, true, true};
constexpr std::array<bool, 7> kWeekend{false, false, false, false, false, true, true};

bool rests(const std::vector<QuietHours>& quiet, Instant at) {
  const auto day = std::chrono::floor<std::chrono::days>(at);
  for (const QuietHours& q : quiet)
    for (const auto begin : {day - std::chrono::days(1), day}) {
      if (!q.days.at(std::chrono::weekday(begin).iso_encoding() - 1)) continue;
      const Instant from = begin + q.from, to = begin + q.to + std::chrono::days(q.to > q.from ? 0 : 1);
      if (from <= at && at < to) return true;
    }
  return false;
}

/// Two standards on two analyzers, read every 8 h; protein pairs every 2 h.
Settings mill() {
  Settings settings = *harrow_mill();
  for (const AnalyzerIndex analyzer : {kLine1, kLine2})
    for (const StandardIndex standard : {kHigh, kLow}) {
      ChartSettings chart;
      chart.analyzer = analyzer;
      chart.standard = standard;
      chart.measurand = kProtein;
      chart.every = 8h;
      chart.overdue = true;
      settings.charts.push_back(chart);
    }
  settings.comparisons[kProteinPairs.value].every = 2h;
  settings.comparisons[kProteinPairs.value].overdue = true;
  return settings;
}

CheckReading check(AnalyzerIndex analyzer, StandardIndex standard) {
  return {Instant{}, analyzer, standard, kProtein, 0, 10.6};
}
SplitReading split(AnalyzerIndex analyzer) {
  return {Instant{}, analyzer, "S-1", kProtein, 0, 10.6};
}

std::vector<std::string> told(const std::vector<Finding>& findings, bool holds = true) {
  std::vector<std::string> names;
  for (const Finding& finding : findings)
    if (finding.holds == holds)
      names.push_back(std::string(to_string(finding.kind)) + " " + finding.subject.analyzer +
                      finding.subject.comparison);
  std::sort(names.begin(), names.end());
  return names;
}

using Names = std::vector<std::string>;
}  // namespace

TEST_CASE("a wait ends when that much time outside the hours of rest has passed, minute by minute") {
  std::mt19937 random(3);
  const auto up_to = [&](int most) { return std::uniform_int_distribution<int>(0, most)(random); };
  for (int round = 0; round < 200; ++round) {
    std::vector<QuietHours> quiet;
    for (int i = up_to(3); i > 0; --i) {
      std::array<bool, 7> days{};
      for (bool& day : days) day = up_to(1) == 1;
      quiet.push_back(hours(days, std::chrono::minutes(up_to(1439)), std::chrono::minutes(1 + up_to(1439))));
    }
    const Instant from = at_hour(0) + std::chrono::minutes(up_to(7 * 1440));
    const auto wait = std::chrono::minutes(1 + up_to(600));
    Instant at = from;
    for (auto left = wait; left > 0min && at < from + std::chrono::days(30); at += 1min)
      if (!rests(quiet, at)) left -= 1min;
    const auto end = end_of_wait(quiet, from, wait);
    REQUIRE(end);
    CHECK(*end == at);
  }
}

TEST_CASE("with rest around the clock no wait is ever over, and without rest it is as long as it is") {
  const std::vector<QuietHours> always = {hours(kEveryDay, 0min, 24h)};
  CHECK_FALSE(end_of_wait(always, at_hour(0), 1h));
  CHECK(end_of_wait({}, at_hour(0), 36h) == at_hour(36));
}

TEST_CASE("a standard is overdue after one and a half times its cadence, and told once for all of them") {
  const Settings settings = mill();
  const OverduePolicy policy;
  Arrivals arrivals(settings, at_hour(0));
  for (int hour = 1; hour < 40; ++hour) {  // line1 gives splits and one of its standards; line2 all
    arrivals.add(split(kLine1), at_hour(hour));
    arrivals.add_pair(kProteinPairs, at_hour(hour));
    arrivals.add(check(kLine1, kLow), at_hour(hour));
    arrivals.add(check(kLine2, kLow), at_hour(hour));
    arrivals.add(check(kLine2, kHigh), at_hour(hour));
    const Names overdue = told(overdue_findings(settings, policy, arrivals, at_hour(hour)));
    CHECK(overdue == (hour <= 12 ? Names{} : Names{"check_overdue line1"}));
  }
  auto findings = overdue_findings(settings, policy, arrivals, at_hour(39));
  const auto found = std::find_if(findings.begin(), findings.end(), [](const Finding& f) { return f.holds; });
  REQUIRE(found != findings.end());
  CHECK(found->started_at == at_hour(12));
  CHECK(std::get<std::vector<std::string>>(found->details.back().second) == Names{"wheat-high"});
  arrivals.add(check(kLine1, kHigh), at_hour(40));
  findings = overdue_findings(settings, policy, arrivals, at_hour(40));
  CHECK(told(findings).empty());
  CHECK(told(findings, false) == Names{"check_overdue line1", "check_overdue line2", "pairs_overdue protein",
                                       "results_silent line1", "results_silent line2"});
}

TEST_CASE("an analyzer from which nothing comes is silent: one alert, not four") {
  const Settings settings = mill();
  Arrivals arrivals(settings, at_hour(0));
  for (int hour = 0; hour <= 30; ++hour) {
    for (const StandardIndex standard : {kHigh, kLow}) arrivals.add(check(kLine2, standard), at_hour(hour));
    const Names overdue = told(overdue_findings(settings, {}, arrivals, at_hour(hour)));
    CHECK(overdue == (hour <= 3 ? Names{} : Names{"results_silent line1"}));
  }
}

TEST_CASE("pairs are overdue although both analyzers give results") {
  const Settings settings = mill();
  Arrivals arrivals(settings, at_hour(0));
  for (const AnalyzerIndex analyzer : {kLine1, kLine2}) arrivals.add(split(analyzer), at_hour(4));
  CHECK(told(overdue_findings(settings, {}, arrivals, at_hour(4))) == Names{"pairs_overdue protein"});
}

TEST_CASE("nothing is overdue that has no cadence, nor in hours of rest") {
  Settings settings = mill();
  const OverduePolicy weekends_off{1.5, {hours(kWeekend, 0min, 24h)}};
  // 2026-02-05 is a Thursday; Friday 18:00 to Monday 06:00 leaves six hours of Friday and six of Monday.
  const Instant friday_evening = at_hour(36);
  Arrivals arrivals(settings, friday_evening);
  for (const AnalyzerIndex analyzer : {kLine1, kLine2}) arrivals.add(split(analyzer), friday_evening + 5h);
  arrivals.add_pair(kProteinPairs, friday_evening + 5h);
  CHECK(told(overdue_findings(settings, weekends_off, arrivals, friday_evening + 54h)).empty());
  CHECK(told(overdue_findings(settings, weekends_off, arrivals, friday_evening + 57h)).size() == 2);
  for (ChartSettings& chart : settings.charts) chart.overdue = false;
  for (ComparisonSettings& comparison : settings.comparisons) comparison.overdue = false;
  CHECK(overdue_findings(settings, {}, arrivals, friday_evening + 1000h).empty());
}

TEST_CASE("what happens while an analyzer is worked on is recorded at once and told afterwards") {
  const auto settings = harrow_mill();
  AlertPolicy policy;
  policy.maintenance = {{kLine2, at_hour(10), at_hour(12)}};
  AlertBook book(policy, settings, {});
  Intervention repair;
  repair.at = at_hour(0);
  repair.analyzer = kLine1;
  repair.kind = InterventionKind::repaired;
  book.hold(repair);
  const Finding unstable{.kind = AlertKind::check_standard_unstable,
                         .subject = {.analyzer = "line1", .standard = "wheat-low", .measurand = "protein"},
                         .severity = Severity::notice};
  const Finding lost{.kind = AlertKind::agreement_lost, .subject = {.comparison = "protein"}};

  auto opened = book.apply(unstable, at_hour(0) + 30min);
  REQUIRE(opened.size() == 1);
  CHECK_FALSE(opened[0].tell);
  CHECK(book.apply(lost, at_hour(0) + 31min).at(0).tell == false);
  CHECK(book.tick(at_hour(0) + 59min).empty());
  auto released = book.tick(at_hour(1));
  REQUIRE(released.size() == 2);
  CHECK(released[0].tell);
  CHECK(released[0].change == AlertChange::opened);
  CHECK(released[0].alert.opened_at == at_hour(0) + 30min);
  CHECK(book.tick(at_hour(2)).empty());

  // A planned window holds what gets worse, and what comes and goes within it is never told.
  Finding worse = lost;
  worse.severity = Severity::critical;
  CHECK_FALSE(book.apply(worse, at_hour(10)).at(0).tell);
  Finding brief{.kind = AlertKind::inbox_unreachable, .subject = {.analyzer = "line2"}};
  CHECK_FALSE(book.apply(brief, at_hour(10)).at(0).tell);
  brief.holds = false;
  CHECK_FALSE(book.apply(brief, at_hour(11)).at(0).tell);
  const auto after = book.tick(at_hour(12));
  const auto of_lost = std::find_if(after.begin(), after.end(), [](const AlertTransition& t) {
    return t.alert.kind == AlertKind::agreement_lost;
  });
  REQUIRE(of_lost != after.end());
  CHECK(of_lost->change == AlertChange::changed);
  CHECK(of_lost->alert.severity == Severity::critical);
}

TEST_CASE("a note and an accepted level hold nothing") {
  AlertBook book({}, harrow_mill(), {});
  Intervention note;
  note.at = at_hour(0);
  note.analyzer = kLine1;
  for (const InterventionKind kind : {InterventionKind::noted, InterventionKind::level_accepted}) {
    note.kind = kind;
    book.hold(note);
  }
  const Finding unstable{.kind = AlertKind::check_standard_unstable, .subject = {.analyzer = "line1"}};
  CHECK(book.apply(unstable, at_hour(0)).at(0).tell);
}

TEST_CASE("a changed configuration does not set the clock of what it did not change") {
  const Settings then = mill();
  Arrivals before(then, at_hour(0));
  before.add(Event{check(kLine2, kLow)}, at_hour(10));
  before.add_pair(kProteinPairs, at_hour(11));

  // line0 comes first now, line1 is gone, and so is the moisture comparison.
  Settings now = then;
  now.analyzers = {{"line0", ""}, {"line2", ""}};
  now.comparisons.erase(now.comparisons.begin());
  const Arrivals after(now, at_hour(20), before, then);
  CHECK(after.analyzer({0}).at == at_hour(20));
  CHECK_FALSE(after.analyzer({0}).came);
  CHECK(after.analyzer({1}).at == at_hour(10));
  CHECK(after.standard({1}, kLow).at == at_hour(10));
  CHECK(after.standard({1}, kLow).came);
  CHECK(after.standard({1}, kHigh).at == at_hour(20));
  CHECK(after.comparison({0}).at == at_hour(11));
}

TEST_CASE("alerts of what is no longer watched end with the reason given; others are left alone") {
  const auto settings = std::make_shared<const Settings>(mill());
  AlertBook book(AlertPolicy{}, settings, {});
  const auto open = [&](AlertKind kind, const Subject& subject) {
    (void)book.apply({.kind = kind, .subject = subject, .at = at_hour(0)}, at_hour(0));
  };
  open(AlertKind::results_silent, {.analyzer = "line1"});
  open(AlertKind::inbox_unreachable, {.analyzer = "line2"});
  open(AlertKind::file_rejected, {.analyzer = "line1"});
  open(AlertKind::check_standard_unstable, {"line1", "wheat-low", "protein", "", ""});
  const auto gone = [](AlertKind, const Subject& subject) { return subject.analyzer != "line1"; };
  const auto ended = book.drop_unwatched(gone, "configuration_changed", at_hour(1));
  REQUIRE(ended.size() == 1);
  CHECK(ended[0].alert.kind == AlertKind::results_silent);
  CHECK(ended[0].alert.state == AlertState::resolved);
  CHECK(ended[0].alert.resolved_reason == "configuration_changed");
  CHECK(book.current().size() == 3);

  CHECK(has_cadence(*settings, AlertKind::check_overdue, {.analyzer = "line1"}));
  CHECK(has_cadence(*settings, AlertKind::results_silent, {.analyzer = "line1"}));
  CHECK(has_cadence(*settings, AlertKind::pairs_overdue, {.comparison = "protein"}));
  CHECK_FALSE(has_cadence(*settings, AlertKind::pairs_overdue, {.comparison = "moisture"}));
  CHECK_FALSE(has_cadence(*settings, AlertKind::check_overdue, {.analyzer = "line3"}));
}
