#include "daemon/webhook/routing.hpp"

#include <doctest/doctest.h>

#include "tests/core/alert/harrow_mill.hpp"

using namespace agreed;
using test::at_hour;

namespace {

const Subject kChart{"line2", "wheat-low", "protein", "", ""};
const Subject kPair{"", "", "", "protein", ""};
const Subject kInbox{"line1", "", "", "", ""};
const Subject kService{"", "", "", "", "agreed"};

AlertTransition transition(AlertKind kind, const Subject& subject, Severity severity) {
  AlertTransition t;
  t.alert.kind = kind;
  t.alert.subject = subject;
  t.alert.severity = severity;
  t.alert.opened_at = t.at = at_hour(0);
  return t;
}

std::string routed(const AlertTransition& t, const std::vector<Route>& routes) {
  std::string names;
  for (const std::size_t i : routes_for(t, routes, *test::harrow_mill())) names += routes[i].name + " ";
  return names;
}

Route route(const std::string& name) {
  Route r;
  r.name = name;
  return r;
}

}  // namespace

TEST_CASE("a route does not hear that it takes nothing itself") {
  const Subject failing{"", "", "", "", "shift"};
  const std::vector<Route> routes = {route("shift"), route("engineer")};
  CHECK(routed(transition(AlertKind::delivery_failing, failing, Severity::critical), routes) == "engineer ");
  CHECK(routed(transition(AlertKind::storage_low, failing, Severity::critical), routes) == "shift engineer ");
}

TEST_CASE("routes choose by kind, severity, analyzer, measurand and comparison") {
  std::vector<Route> routes = {route("all"),     route("kinds"),        route("warning"), route("critical"),
                               route("line2"),   route("moisture"),     route("protein"), route("pair"),
                               route("no-pair"), route("line1+protein")};
  routes[1].kinds = {AlertKind::agreement_lost, AlertKind::file_rejected};
  routes[2].at_least = Severity::warning;
  routes[3].at_least = Severity::critical;
  routes[4].analyzers = {"line2"};
  routes[5].measurands = {"moisture"};
  routes[6].measurands = {"protein"};
  routes[7].comparisons = {"protein"};
  routes[8].comparisons = {"moisture"};
  routes[9].analyzers = {"line1"};
  routes[9].measurands = {"protein"};
  CHECK(routed(transition(AlertKind::check_standard_unstable, kChart, Severity::warning), routes) ==
        "all warning line2 protein ");
  CHECK(routed(transition(AlertKind::agreement_lost, kPair, Severity::critical), routes) ==
        "all kinds warning critical line2 protein pair line1+protein ");
  CHECK(routed(transition(AlertKind::file_rejected, kInbox, Severity::warning), routes) ==
        "all kinds warning ");
  CHECK(routed(transition(AlertKind::pair_outlier, kPair, Severity::notice), routes) ==
        "all line2 protein pair line1+protein ");
  CHECK(routed(transition(AlertKind::storage_low, kService, Severity::critical), routes) ==
        "all warning critical ");
}

TEST_CASE("what is not told goes nowhere; every told change goes out") {
  auto t = transition(AlertKind::agreement_lost, kPair, Severity::critical);
  const std::vector<Route> routes = {route("all")};
  for (const auto change : {AlertChange::opened, AlertChange::changed, AlertChange::acknowledged,
                            AlertChange::resolved, AlertChange::reminder}) {
    t.change = change;
    t.tell = true;
    CHECK(routed(t, routes) == "all ");
    t.tell = false;
    CHECK(routed(t, routes) == "");
  }
}

TEST_CASE("a comparison that is not configured any more still has its own id") {
  std::vector<Route> routes = {route("pair"), route("line1")};
  routes[0].comparisons = {"ash"};
  routes[1].analyzers = {"line1"};
  CHECK(routed(transition(AlertKind::agreement_lost, {"", "", "", "ash", ""}, Severity::critical), routes) ==
        "pair ");
}

TEST_CASE("a route for what nobody acknowledged hears nothing before, and everything after") {
  std::vector<Route> routes = {route("late")};
  routes[0].unacknowledged_for = std::chrono::hours(1);
  auto t = transition(AlertKind::agreement_lost, kPair, Severity::critical);
  CHECK(routed(t, routes) == "");
  t.at = at_hour(1);
  t.change = AlertChange::reminder;
  CHECK(routed(t, routes) == "late ");
  t.change = AlertChange::acknowledged;
  t.at = at_hour(2);
  t.alert.acknowledged = Acknowledgement{"M. Byrne", at_hour(2), ""};
  CHECK(routed(t, routes) == "late ");
  t.alert.acknowledged->at = at_hour(0) + std::chrono::minutes(59);
  CHECK(routed(t, routes) == "");
}

TEST_CASE("an escalation is due when the waiting time is over, unless somebody acknowledged or works on it") {
  std::vector<Route> routes = {route("all"), route("late"), route("later")};
  routes[1].unacknowledged_for = std::chrono::hours(1);
  routes[2].unacknowledged_for = std::chrono::hours(3);
  routes[2].at_least = Severity::critical;
  const auto open = std::make_shared<Alert>(
      transition(AlertKind::check_standard_unstable, kChart, Severity::warning).alert);
  const auto seen = std::make_shared<Alert>(*open);
  seen->state = AlertState::acknowledged;
  const std::vector<SharedAlert> current = {open, seen};
  const auto due_at = [&](int hour) {
    return escalations(current, routes, *test::harrow_mill(), at_hour(hour));
  };
  CHECK(due_at(0).empty());
  const auto due = due_at(1);
  REQUIRE(due.size() == 1);
  CHECK(due[0].alert == open.get());
  CHECK(due[0].route == 1);
  CHECK(due_at(5).size() == 1);
  open->severity = Severity::critical;
  CHECK(due_at(2).size() == 1);
  CHECK(due_at(5).size() == 2);
  open->held = AlertChange::opened;
  CHECK(due_at(5).empty());
}
