// What the service says of itself: pure states in, findings out.
#include "daemon/engine/service_watch.hpp"

#include <string>

#include <doctest/doctest.h>

using namespace agreed;
using namespace std::chrono_literals;

namespace {
constexpr Instant kNow{std::chrono::seconds(1770271200)};
}

TEST_CASE("an inbox that stays out of reach is told; one that only missed a look, or had none yet, is not") {
  Settings settings;
  std::vector<InboxState> states(5);
  std::vector<std::filesystem::path> inboxes;
  for (std::size_t i = 0; i < states.size(); ++i) {
    settings.analyzers.push_back({"line" + std::to_string(i), ""});
    inboxes.push_back("/drop/line" + std::to_string(i));
  }
  states[0].reachable = true;
  states[1].failed_looks = 1;
  states[2].failed_looks = 2;
  states[2].reason = "No such file or directory";
  states[2].unreachable_since = kNow - 30s;
  states[3].hangs = true;
  const auto findings = inbox_findings(settings, inboxes, states, kNow);
  REQUIRE(findings.size() == 3);
  CHECK_FALSE(findings[0].holds);
  CHECK(findings[0].subject.analyzer == "line0");
  CHECK(findings[1].holds);
  CHECK(findings[1].subject.analyzer == "line2");
  CHECK(findings[1].severity == Severity::warning);
  CHECK(findings[1].started_at == kNow - 30s);
  CHECK(findings[2].subject.analyzer == "line3");
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
