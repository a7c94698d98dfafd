// A changed configuration: the same history folded under other settings, and the alert book compared with it.
#include <algorithm>
#include <random>
#include <set>
#include <tuple>

#include <doctest/doctest.h>

#include "core/alert/alert_book.hpp"
#include "core/alert/collected.hpp"
#include "tests/core/monitor/mill.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

using Key = std::tuple<AlertKind, std::string, std::string, std::string, std::string>;

Key key_of(AlertKind kind, const Subject& subject) {
  return {kind, subject.analyzer, subject.standard, subject.measurand, subject.comparison};
}

/// The mill with a third check standard, of which nothing was measured yet; every chart's and comparison's
/// share of the alarm budget is smaller by that.
std::shared_ptr<const Settings> with_a_standard_more() {
  auto settings = std::make_shared<Settings>(*harrow_mill());
  settings->standards.insert(settings->standards.begin(), {"rye", "rye"});
  for (ChartSettings& chart : settings->charts) ++chart.standard.value;
  for (std::uint32_t analyzer = 0; analyzer < 2; ++analyzer) {
    ChartSettings chart = settings->charts.front();
    chart.analyzer = {analyzer};
    chart.standard = {0};
    settings->charts.push_back(chart);
  }
  const double share = 7.0 / 5.0;
  for (ChartSettings& chart : settings->charts) {
    chart.level_run_length *= share;
    chart.precision_run_length *= share;
  }
  ComparisonSettings& comparison = settings->comparisons.front();
  comparison.warning_run_length *= share;
  comparison.outlier_run_length *= share;
  comparison.scatter_run_length *= share;
  return settings;
}

/// The same events by the indexes of `with_a_standard_more`.
std::vector<Event> reindexed(std::vector<Event> events) {
  for (Event& event : events)
    if (auto* check = std::get_if<CheckReading>(&event)) ++check->standard.value;
  return events;
}

std::vector<Finding> conditions_of(const Monitor& monitor, const Settings& settings) {
  std::vector<Finding> all;
  const auto add = [&all](const std::vector<Finding>& more) {
    std::copy_if(more.begin(), more.end(), std::back_inserter(all), [](const Finding& f) { return f.holds; });
  };
  for (std::uint32_t i = 0; i < settings.charts.size(); ++i) add(monitor.conditions(ChartIndex{i}));
  for (std::uint32_t i = 0; i < settings.comparisons.size(); ++i) add(monitor.conditions(ComparisonIndex{i}));
  return all;
}

std::set<Key> keys_of(const std::vector<Finding>& findings) {
  std::set<Key> keys;
  for (const Finding& finding : findings)
    if (!resolves_on_acknowledgement(finding.kind)) keys.insert(key_of(finding.kind, finding.subject));
  return keys;
}

std::set<Key> open_in(const AlertBook& book) {
  std::set<Key> keys;
  for (const SharedAlert& alert : book.current())
    if (!resolves_on_acknowledgement(alert->kind)) keys.insert(key_of(alert->kind, alert->subject));
  return keys;
}

std::vector<Alert> all_of(const AlertBook& book) {
  std::vector<Alert> alerts;
  for (const SharedAlert& alert : book.current()) alerts.push_back(*alert);
  return alerts;
}

}  // namespace

TEST_CASE(
    "after a standard more the book holds what the fold under the new settings calls for, and no more") {
  int opened_before = 0, resolved = 0, limits_raised = 0;
  for (unsigned seed = 1; seed <= 25; ++seed) {
    CAPTURE(seed);
    std::mt19937 random(seed);
    const auto then = harrow_mill(), now = with_a_standard_more();
    const auto events = weeks(random, 60);

    Record record(*then);
    record.add(events);
    Monitor monitor(then);
    AlertBook book(AlertPolicy{}, then, {});
    (void)monitor.fold_all(record);
    (void)book.reconcile(conditions_of(monitor, *then), {}, "late_data", hour(500));
    REQUIRE(open_in(book) == keys_of(conditions_of(monitor, *then)));
    opened_before += static_cast<int>(open_in(book).size());

    const auto same_events = reindexed(events);
    Record new_record(*now);
    new_record.add(same_events);
    Monitor after(now);
    (void)after.fold_all(new_record);
    check_same(after, fold_in_batches(same_events, random, now), *now);

    const auto conditions = conditions_of(after, *now);
    AlertBook restored(AlertPolicy{}, now, all_of(book));
    const auto open_before = open_in(restored);
    for (const AlertTransition& transition :
         restored.reconcile(conditions, {}, "configuration_changed", hour(501))) {
      const Key key = key_of(transition.alert.kind, transition.alert.subject);
      if (transition.change == AlertChange::opened) {
        CHECK(keys_of(conditions).contains(key));
        CHECK_FALSE(open_before.contains(key));
      }
      if (transition.change != AlertChange::resolved) continue;
      ++resolved;
      CHECK(transition.alert.resolved_reason == "configuration_changed");
      CHECK_FALSE(keys_of(conditions).contains(key));
    }
    CHECK(open_in(restored) == keys_of(conditions));
    CHECK(restored.reconcile(conditions, {}, "configuration_changed", hour(502), false).empty());

    for (std::uint32_t i = 0; i < then->charts.size(); ++i) {
      const auto before_limit = monitor.chart({i}).view().change.limit;
      const auto limit = after.chart({i}).view().change.limit;
      if (limit > before_limit) ++limits_raised;
    }
  }
  // Or nothing of the above was tried.
  CHECK(opened_before > 25);
  CHECK(limits_raised > 50);
  MESSAGE(opened_before << " alerts were open, " << resolved << " resolved by the change");
}
