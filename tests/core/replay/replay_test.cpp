// A replay against the same events driven through monitor and book by hand.
#include "core/replay/replay.hpp"

#include <doctest/doctest.h>

#include "../monitor/mill.hpp"
#include "core/replay/episodes.hpp"

namespace agreed::testing {
namespace {

struct Told {
  AlertChange change;
  Instant at;
  AlertKind kind;
  Subject subject;
  bool operator==(const Told&) const = default;
};

void append(std::vector<Told>& list, const std::vector<AlertTransition>& transitions) {
  for (const AlertTransition& t : transitions)
    if (t.change == AlertChange::opened || t.change == AlertChange::resolved)
      list.push_back({t.change, t.at, t.alert.kind, t.alert.subject});
}

std::vector<Told> replayed(const std::shared_ptr<const Settings>& settings, const std::vector<Event>& events,
                           const AlertPolicy& policy = {}) {
  Replay replay(settings, policy, events, {});
  while (replay.step()) {
  }
  CHECK(replay.folded() == events.size());
  std::vector<Told> told;
  append(told, replay.transitions());
  return told;
}

/// One event after the other, each known only when it happens.
std::vector<Told> by_hand(const std::shared_ptr<const Settings>& settings, const std::vector<Event>& events) {
  Record record(*settings);
  Monitor monitor(settings);
  AlertBook book({}, settings, {});
  std::vector<Told> told;
  for (const Event& event : events) {
    record.add({event});
    const MonitorOutcome outcome = monitor.apply({event}, record);
    REQUIRE(outcome.charts_refolded.empty());
    REQUIRE(outcome.comparisons_refolded.empty());
    for (const Finding& finding : outcome.findings) append(told, book.apply(finding, finding.at));
  }
  return told;
}

std::vector<Event> weeks_without_replicates(std::mt19937& random) {
  std::vector<Event> events = weeks(random, 200);
  std::erase_if(events, [](const Event& event) {
    const auto* split = std::get_if<SplitReading>(&event);
    return split != nullptr && split->replicate > 0;
  });
  return events;
}

bool told_by_readings(const Told& told) {
  return told.kind != AlertKind::unpaired_samples;
}

TEST_CASE("a replay raises and ends what the service would have, event by event, at the same moments") {
  std::size_t compared = 0;
  for (unsigned seed = 1; seed <= 6; ++seed) {
    CAPTURE(seed);
    std::mt19937 random(seed);
    const auto settings = harrow_mill();
    const std::vector<Event> events = weeks_without_replicates(random);
    auto told = replayed(settings, events);
    std::erase_if(told, [](const Told& t) { return !told_by_readings(t); });
    const auto expected = by_hand(settings, events);
    compared += expected.size();
    REQUIRE(told.size() == expected.size());
    for (std::size_t i = 0; i < told.size(); ++i) CHECK(told[i] == expected[i]);
  }
  CHECK(compared > 20);
}

TEST_CASE("a replay does not depend on the order in which its events are given") {
  std::mt19937 random(11);
  const auto settings = harrow_mill();
  std::vector<Event> events = weeks(random, 120);
  const auto told = replayed(settings, events);
  CHECK_FALSE(told.empty());
  std::shuffle(events.begin(), events.end(), random);
  CHECK(replayed(settings, events) == told);
}

TEST_CASE("what is overdue opens within a minute of its time, and ends with the reading that comes") {
  auto settings = std::make_shared<Settings>(*harrow_mill());
  for (ChartSettings& chart : settings->charts) {
    chart.every = std::chrono::hours(8);
    chart.overdue = chart.analyzer.value == 0 && chart.standard.value == 0;
  }
  std::vector<Event> events;
  const auto check = [&](double at, std::uint32_t standard) {
    events.emplace_back(CheckReading{hour(at), {0}, {standard}, {0}, 0, 10.0 + std::sin(at)});
  };
  for (const double at : {0.0, 8.0, 16.0, 40.0, 48.0}) check(at, 0);  // overdue from 16 + 12 on, until 40
  for (double at = 1; at < 50; at += 3) check(at, 1);                 // the analyzer is not silent
  const auto told = replayed(settings, events);
  REQUIRE(told.size() == 2);
  CHECK(told[0].kind == AlertKind::check_overdue);
  CHECK(told[0].change == AlertChange::opened);
  CHECK(told[0].at >= hour(28));
  CHECK(told[0].at <= hour(28) + std::chrono::minutes(2));
  CHECK(told[1].change == AlertChange::resolved);
  CHECK(told[1].at == hour(40));
}

TEST_CASE("an acknowledgement of then ends what only ends by one") {
  const auto settings = harrow_mill();
  std::vector<Event> events;
  for (int i = 0; i < 200; ++i)  // halves without a partner
    events.emplace_back(SplitReading{hour(i), {0}, "S-" + std::to_string(i), {0}, 0, 10.0});
  const Subject line1{.analyzer = "line1"};
  Replay replay(settings, {}, events, {{hour(100.5), AlertKind::unpaired_samples, line1, "M. Keane"}});
  while (replay.step()) {
  }
  std::vector<Told> told;
  append(told, replay.transitions());
  REQUIRE(told.size() == 3);
  CHECK(told[0].change == AlertChange::opened);
  CHECK(told[1] == Told{AlertChange::resolved, hour(100.5), AlertKind::unpaired_samples, line1});
  CHECK(told[2].change == AlertChange::opened);
}

AlertTransition step_of(AlertChange change, Severity severity) {
  Alert alert;
  alert.id = 1;
  alert.kind = AlertKind::agreement_drifting;
  alert.subject.comparison = "protein";
  alert.severity = severity;
  return {change, {}, true, alert};
}

AlertEpisode episode(double opened, std::optional<double> ended, const char* comparison = "protein") {
  AlertEpisode e;
  e.kind = AlertKind::agreement_drifting;
  e.subject.comparison = comparison;
  e.steps = {{AlertChange::opened, hour(opened), Severity::warning}};
  if (ended) e.ended_at = hour(*ended);
  return e;
}

TEST_CASE("an alert that opens again is another episode, and only a worse severity is a step") {
  Episodes episodes;
  episodes.add(step_of(AlertChange::resolved, Severity::warning), hour(0));  // its opening is not known
  episodes.add(step_of(AlertChange::opened, Severity::warning), hour(1));
  episodes.add(step_of(AlertChange::changed, Severity::warning), hour(2));
  episodes.add(step_of(AlertChange::changed, Severity::critical), hour(3));
  episodes.add(step_of(AlertChange::resolved, Severity::critical), hour(4));
  episodes.add(step_of(AlertChange::opened, Severity::warning), hour(5));
  const auto list = episodes.take();
  REQUIRE(list.size() == 2);
  CHECK(list[0].steps.size() == 3);
  CHECK(list[0].severity == Severity::critical);
  CHECK(list[0].opened_at() == hour(1));
  CHECK(list[0].ended_at == hour(4));
  CHECK(list[1].opened_at() == hour(5));
  CHECK_FALSE(list[1].ended_at);
}

TEST_CASE("episodes match when they overlap or are near, each with one partner") {
  const Duration near = std::chrono::hours(1);
  const auto rows = match_episodes({episode(10, 20), episode(30, {}), episode(40, 41, "moisture")},
                                   {episode(20.5, 22), episode(15, 16), episode(50, 51, "moisture")}, near);
  REQUIRE(rows.size() == 5);
  CHECK(rows[0].now->opened_at() == hour(10));
  CHECK(rows[0].then->opened_at() == hour(20.5));  // the first that fits
  CHECK_FALSE(rows[1].now);
  CHECK(rows[1].then->opened_at() == hour(15));
  CHECK_FALSE(rows[2].then);
  CHECK_FALSE(rows[3].then);
  CHECK_FALSE(rows[4].now);
}

}  // namespace
}  // namespace agreed::testing
