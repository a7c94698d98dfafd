// What the service says of itself: pure states in, findings out.
#include "daemon/engine/service_watch.hpp"

#include <string>

#include <doctest/doctest.h>

using namespace agreed;
using namespace std::chrono_literals;

namespace {
constexpr Instant kNow{std::chrono::seconds(1770271200)};
}

TEST_CASE("an inbox that cannot be reached is told, one that was not looked at is not") {
  Settings settings;
  settings.analyzers = {{"line1", ""}, {"line2", ""}, {"line3", ""}};
  const std::vector<std::filesystem::path> inboxes = {"/a", "/b", "/c"};
  const std::vector<InboxState> states = {
      {.reachable = true, .reason = "", .pending = 0, .scanned_once = true},
      {.reachable = false, .reason = "No such file or directory", .pending = 0, .scanned_once = true},
      {}};
  const auto findings = inbox_findings(settings, inboxes, states, kNow);
  REQUIRE(findings.size() == 2);
  CHECK_FALSE(findings[0].holds);
  CHECK(findings[0].subject.analyzer == "line1");
  CHECK(findings[1].holds);
  CHECK(findings[1].subject.analyzer == "line2");
  CHECK(findings[1].severity == Severity::warning);
}

TEST_CASE("little room is critical, and it is over only with some to spare") {
  const auto at = [](double free, double capacity, std::optional<double> least = {}) {
    const auto finding = storage_finding("/state", {free, capacity}, least, kNow);
    return !finding ? "neither" : finding->holds ? to_string(finding->severity) : "room";
  };
  CHECK(std::string(at(199e6, 100e9)) == "critical");
  CHECK(std::string(at(210e6, 100e9)) == "neither");
  CHECK(std::string(at(230e6, 100e9)) == "room");
  CHECK(std::string(at(30e6, 100e6)) == "room");
  CHECK(std::string(at(9e6, 100e6)) == "critical");
  CHECK(std::string(at(30e6, 100e6, 50)) == "critical");
  CHECK(std::string(at(0, 0, 0)) == "room");
  const auto room = room_for(".");
  REQUIRE(room);
  CHECK(room->free > 0);
  CHECK(room->capacity >= room->free);
  CHECK_FALSE(room_for("/there/is/no/such/folder"));
}

TEST_CASE("an endpoint that fails is told after an hour, one that is gone at once") {
  Route route;
  route.name = "shift";
  const auto of = [&](const std::optional<FailingDelivery>& failing) {
    return delivery_finding(route, failing, kNow);
  };
  CHECK_FALSE(of({})->holds);
  CHECK_FALSE(of(FailingDelivery{kNow - 59min, 500}));
  REQUIRE(of(FailingDelivery{kNow - 60min, 500}));
  CHECK(of(FailingDelivery{kNow - 60min, 500})->holds);
  CHECK(of(FailingDelivery{kNow - 60min, 0})->subject.service == "shift");
  CHECK(of(FailingDelivery{kNow, 410})->holds);
  CHECK(of(FailingDelivery{kNow, 410})->severity == Severity::critical);
}
