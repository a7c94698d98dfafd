#include "core/alert/alert_book.hpp"

#include <stdexcept>

#include <doctest/doctest.h>

#include "core/alert/details.hpp"
#include "tests/core/alert/harrow_mill.hpp"

using namespace agreed;
using test::at_hour;

namespace {

const Subject kChart{"line2", "wheat-low", "protein", "", ""};
const Subject kPair{"", "", "", "protein", ""};
const Subject kLine1{"line1", "", "", "", ""};

Finding unstable(Severity severity = Severity::warning, double shift = 0.1) {
  Finding finding;
  finding.kind = AlertKind::check_standard_unstable;
  finding.subject = kChart;
  finding.severity = severity;
  finding.started_at = at_hour(-8);
  finding.started_between = Period{at_hour(-16), at_hour(0)};
  finding.details = {{"pattern", "shift"}, {"shift", shift}};
  return finding;
}

Finding ceased(std::string reason = "ended") {
  Finding finding = unstable();
  finding.holds = false;
  finding.resolved_reason = std::move(reason);
  finding.details.clear();
  return finding;
}

Finding outlier(const std::string& sample) {
  Finding finding;
  finding.kind = AlertKind::pair_outlier;
  finding.subject = kPair;
  finding.severity = Severity::notice;
  finding.details = {{"sample", sample}, {"residual", 4.1}};
  return finding;
}

AlertBook empty_book(AlertPolicy policy = {}) {
  return AlertBook(policy, test::harrow_mill(), {});
}

const AlertTransition& only(const std::vector<AlertTransition>& transitions) {
  REQUIRE(transitions.size() == 1);
  return transitions.front();
}

}  // namespace

TEST_CASE("a finding that holds opens one alert; saying it again says nothing new") {
  auto book = empty_book();
  const auto first = book.apply(unstable(), at_hour(0));
  const auto& opened = only(first);
  CHECK(opened.change == AlertChange::opened);
  CHECK(opened.tell);
  CHECK(opened.at == at_hour(0));
  CHECK(opened.alert.id == 1);
  CHECK(opened.alert.state == AlertState::open);
  CHECK(opened.alert.opened_at == at_hour(0));
  CHECK(opened.alert.told_at == at_hour(0));
  CHECK(opened.alert.started_between == Period{at_hour(-16), at_hour(0)});
  CHECK_FALSE(opened.alert.title.empty());
  CHECK_FALSE(opened.alert.text.empty());
  CHECK(book.apply(unstable(), at_hour(1)).empty());
  CHECK(book.current().size() == 1);
}

TEST_CASE("a further finding changes the alert without telling; one that is worse is told") {
  auto book = empty_book();
  (void)book.apply(unstable(Severity::notice, 0.02), at_hour(0));
  const auto more = book.apply(unstable(Severity::notice, 0.03), at_hour(1));
  CHECK(only(more).change == AlertChange::changed);
  CHECK_FALSE(only(more).tell);
  CHECK(only(more).alert.changed_at == at_hour(1));
  CHECK(only(more).alert.told_at == at_hour(0));
  CHECK(number_in(only(more).alert.details, "shift") == 0.03);
  const auto worse = book.apply(unstable(Severity::warning, 0.1), at_hour(2));
  CHECK(only(worse).change == AlertChange::changed);
  CHECK(only(worse).tell);
  CHECK(only(worse).alert.told_at == at_hour(2));
  CHECK(only(worse).alert.opened_at == at_hour(0));
}

TEST_CASE("severity never falls while the alert lasts, and a missing start leaves the estimate") {
  auto book = empty_book();
  (void)book.apply(unstable(Severity::critical), at_hour(0));
  auto milder = unstable(Severity::notice, 0.01);
  milder.started_at.reset();
  milder.started_between.reset();
  const auto after = book.apply(milder, at_hour(1));
  CHECK(only(after).alert.severity == Severity::critical);
  CHECK(only(after).alert.started_at == at_hour(-8));
  CHECK_FALSE(only(after).tell);
}

TEST_CASE("a condition that ceased resolves; ceasing again, or of what was never open, says nothing") {
  auto book = empty_book();
  CHECK(book.apply(ceased(), at_hour(0)).empty());
  (void)book.apply(unstable(), at_hour(0));
  const auto over = book.apply(ceased("not_confirmed"), at_hour(3));
  CHECK(only(over).change == AlertChange::resolved);
  CHECK(only(over).tell);
  CHECK(only(over).alert.resolved_at == at_hour(3));
  CHECK(only(over).alert.resolved_reason == "not_confirmed");
  CHECK(only(over).alert.text.rfind("Resolved 2026-02-05 09:00 UTC: not confirmed.", 0) == 0);
  CHECK(book.apply(ceased(), at_hour(4)).empty());
  CHECK(book.current().empty());
}

TEST_CASE("what comes back within reopen_within has the same id and begins anew; later it has a new one") {
  for (const auto& [hours, id] : {std::pair{23, 1}, std::pair{24, 2}}) {
    CAPTURE(hours);
    auto book = empty_book();
    (void)book.apply(unstable(Severity::critical), at_hour(0));
    (void)book.acknowledge(1, "M. Byrne", "seen", at_hour(1));
    (void)book.apply(ceased(), at_hour(2));
    const auto again = book.apply(unstable(), at_hour(2 + hours));
    CHECK(only(again).change == AlertChange::opened);
    CHECK(only(again).tell);
    const Alert& alert = only(again).alert;
    CHECK(alert.id == id);
    CHECK(alert.state == AlertState::open);
    CHECK(alert.severity == Severity::warning);
    CHECK_FALSE(alert.acknowledged);
    CHECK_FALSE(alert.resolved_at);
    CHECK(alert.resolved_reason.empty());
    CHECK(alert.opened_at == at_hour(2 + hours));
  }
}

TEST_CASE("alerts of another kind or subject are other alerts") {
  auto book = empty_book();
  auto biased = unstable();
  biased.kind = AlertKind::check_standard_biased;
  auto elsewhere = unstable();
  elsewhere.subject.standard = "wheat-high";
  CHECK(only(book.apply(unstable(), at_hour(0))).alert.id == 1);
  CHECK(only(book.apply(biased, at_hour(0))).alert.id == 2);
  CHECK(only(book.apply(elsewhere, at_hour(0))).alert.id == 3);
  (void)book.apply(ceased(), at_hour(1));
  REQUIRE(book.current().size() == 2);
  CHECK(book.current()[0]->id == 2);
  CHECK(book.current()[1]->id == 3);
}

TEST_CASE("acknowledging: the first one stands, a worse finding is told all the same") {
  auto book = empty_book();
  (void)book.apply(unstable(Severity::warning), at_hour(0));
  const auto acknowledged = book.acknowledge(1, "M. Byrne", "lamp ordered", at_hour(1));
  CHECK(only(acknowledged).change == AlertChange::acknowledged);
  CHECK(only(acknowledged).tell);
  CHECK(only(acknowledged).alert.acknowledged == Acknowledgement{"M. Byrne", at_hour(1), "lamp ordered"});
  CHECK(only(acknowledged).alert.text.find("Acknowledge") == std::string::npos);
  CHECK(book.acknowledge(1, "another", "", at_hour(2)).empty());
  const auto worse = book.apply(unstable(Severity::critical), at_hour(3));
  CHECK(only(worse).tell);
  CHECK(only(worse).alert.state == AlertState::acknowledged);
  CHECK(only(worse).alert.acknowledged->by == "M. Byrne");
}

TEST_CASE("acknowledging what was never given is out of range, what is over is a logic error, however old") {
  auto book = empty_book();
  CHECK_THROWS_AS((void)book.acknowledge(1, "a", "", at_hour(0)), std::out_of_range);
  CHECK_THROWS_AS((void)book.acknowledge(0, "a", "", at_hour(0)), std::out_of_range);
  (void)book.apply(unstable(), at_hour(0));
  (void)book.apply(ceased(), at_hour(1));
  CHECK_THROWS_AS((void)book.acknowledge(1, "a", "", at_hour(2)), std::logic_error);
  (void)book.tick(at_hour(100));  // forgotten by now
  CHECK_THROWS_AS((void)book.acknowledge(1, "a", "", at_hour(100)), std::logic_error);
  CHECK_THROWS_AS((void)book.acknowledge(2, "a", "", at_hour(100)), std::out_of_range);
}

TEST_CASE("a set-aside pair is resolved by its acknowledgement; the next one reopens with its own list") {
  auto book = empty_book();
  (void)book.apply(outlier("S-1"), at_hour(0));
  const auto second = book.apply(outlier("S-2"), at_hour(1));
  CHECK_FALSE(only(second).tell);
  CHECK(list_in(only(second).alert.details, "samples") == std::vector<std::string>{"S-1", "S-2"});
  CHECK(number_in(only(second).alert.details, "count") == 2.0);
  const auto seen = book.acknowledge(1, "M. Byrne", "mixed up", at_hour(2));
  REQUIRE(seen.size() == 2);
  CHECK(seen[0].change == AlertChange::acknowledged);
  CHECK(seen[1].change == AlertChange::resolved);
  CHECK(seen[1].tell);
  CHECK(seen[1].alert.state == AlertState::resolved);
  CHECK(seen[1].alert.resolved_reason == "acknowledged");
  CHECK(seen[1].alert.acknowledged->by == "M. Byrne");
  CHECK(book.current().empty());
  const auto third = book.apply(outlier("S-3"), at_hour(3));
  CHECK(only(third).change == AlertChange::opened);
  CHECK(only(third).alert.id == 1);
  CHECK(list_in(only(third).alert.details, "samples") == std::vector<std::string>{"S-3"});
}

TEST_CASE("a second happening without any difference but the count is kept") {
  auto book = empty_book();
  Finding conflict;
  conflict.kind = AlertKind::readings_conflict;
  conflict.subject = kLine1;
  conflict.details = {{"item", "wheat-low"}};
  (void)book.apply(conflict, at_hour(0));
  CHECK(number_in(only(book.apply(conflict, at_hour(1))).alert.details, "count") == 2.0);
}

TEST_CASE("reminders: every remind_every while nobody has acknowledged, counted from what was told last") {
  auto book = empty_book();
  (void)book.apply(unstable(Severity::notice), at_hour(0));
  CHECK(book.tick(at_hour(7)).empty());
  const auto first = book.tick(at_hour(8));
  CHECK(only(first).change == AlertChange::reminder);
  CHECK(only(first).tell);
  CHECK(only(first).alert.changed_at == at_hour(0));
  CHECK(book.tick(at_hour(9)).empty());
  (void)book.apply(unstable(Severity::warning), at_hour(10));
  CHECK(book.tick(at_hour(17)).empty());
  CHECK(book.tick(at_hour(18)).size() == 1);
  (void)book.acknowledge(1, "M. Byrne", "", at_hour(19));
  CHECK(book.tick(at_hour(60)).empty());
}

TEST_CASE("reminders: none with zero, and a clock set back a year does not silence them for a year") {
  AlertPolicy never;
  never.remind_every = Duration::zero();
  auto quiet = empty_book(never);
  (void)quiet.apply(unstable(), at_hour(0));
  CHECK(quiet.tick(at_hour(1000)).empty());

  auto book = empty_book();
  (void)book.apply(unstable(), at_hour(8760));
  CHECK(book.tick(at_hour(0)).size() == 1);
  CHECK(book.tick(at_hour(1)).empty());
}

TEST_CASE("after a fold: opens what holds, resolves what does not, leaves others alone") {
  auto book = empty_book();
  (void)book.apply(unstable(), at_hour(0));
  (void)book.apply(outlier("S-1"), at_hour(0));
  Finding unreachable;
  unreachable.kind = AlertKind::inbox_unreachable;
  unreachable.subject = kLine1;
  (void)book.apply(unreachable, at_hour(0));
  Finding lost;
  lost.kind = AlertKind::agreement_lost;
  lost.subject = kPair;
  lost.severity = Severity::critical;
  const auto transitions = book.reconcile(std::vector{lost}, {}, "configuration_changed", at_hour(1));
  REQUIRE(transitions.size() == 2);
  CHECK(transitions[0].change == AlertChange::resolved);
  CHECK(transitions[0].alert.kind == AlertKind::check_standard_unstable);
  CHECK(transitions[0].alert.resolved_reason == "configuration_changed");
  CHECK(transitions[1].change == AlertChange::opened);
  CHECK(transitions[1].alert.kind == AlertKind::agreement_lost);
  CHECK(book.current().size() == 3);
  CHECK(book.reconcile(std::vector{lost}, {}, "late_data", at_hour(2)).empty());
}

TEST_CASE("after a restart an alert that still holds reads as it was told; what is missing is opened") {
  auto book = empty_book();
  (void)book.apply(unstable(), at_hour(0));
  auto later = unstable();
  later.details = {{"readings_since", 18.0}};
  later.started_at = at_hour(-5);
  auto other = unstable();
  other.subject.standard = "wheat-high";
  const auto told = *book.find_current(later.kind, later.subject);
  const auto transitions = book.reconcile(std::vector{later, other}, {}, "late_data", at_hour(1), false);
  CHECK(only(transitions).alert.subject == other.subject);
  CHECK(*book.find_current(later.kind, later.subject) == told);
  CHECK(only(book.reconcile(std::vector{later, other}, {}, "configuration_changed", at_hour(2))).change ==
        AlertChange::changed);
}

TEST_CASE("after a fold of some streams only their alerts are compared") {
  auto book = empty_book();
  (void)book.apply(unstable(), at_hour(0));
  auto elsewhere = unstable();
  elsewhere.subject.standard = "wheat-high";
  CHECK(book.reconcile(std::vector{elsewhere}, std::vector{kPair}, "late_data", at_hour(1)).empty());
  const auto transitions =
      book.reconcile(std::vector{elsewhere}, std::vector{kChart}, "late_data", at_hour(1));
  CHECK(only(transitions).change == AlertChange::resolved);
  CHECK(only(transitions).alert.subject == kChart);
}

TEST_CASE("late data admits a set-aside pair: resolved only when none of its samples is set aside any more") {
  auto book = empty_book();
  (void)book.apply(outlier("S-1"), at_hour(0));
  (void)book.apply(outlier("S-2"), at_hour(0));
  CHECK(book.admit_outliers("moisture", {}, at_hour(1)).empty());
  CHECK(book.admit_outliers("protein", std::vector<std::string>{"S-9", "S-2"}, at_hour(1)).empty());
  const auto admitted = book.admit_outliers("protein", std::vector<std::string>{"S-9"}, at_hour(1));
  CHECK(only(admitted).change == AlertChange::resolved);
  CHECK(only(admitted).alert.resolved_reason == "late_data");
  CHECK(book.admit_outliers("protein", {}, at_hour(2)).empty());
}

TEST_CASE("a restored book goes on where it was: ids, reminders, reopening") {
  auto book = empty_book();
  (void)book.apply(unstable(), at_hour(0));
  const Alert over = only(book.apply(ceased(), at_hour(1))).alert;
  const Alert open = only(book.apply(outlier("S-1"), at_hour(1))).alert;
  AlertBook restored({}, test::harrow_mill(), {open, over});
  CHECK(restored.current().size() == 1);
  CHECK(*restored.current().front() == open);
  CHECK(restored.tick(at_hour(8)).empty());
  CHECK(restored.tick(at_hour(9)).size() == 1);
  CHECK(only(restored.apply(unstable(), at_hour(10))).alert.id == 1);
  auto elsewhere = unstable();
  elsewhere.subject.standard = "wheat-high";
  CHECK(only(restored.apply(elsewhere, at_hour(10))).alert.id == 3);
}

TEST_CASE("a book without settings cannot be made") {
  CHECK_THROWS_AS(AlertBook({}, nullptr, {}), std::invalid_argument);
}
