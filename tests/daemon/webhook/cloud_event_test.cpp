#include "daemon/webhook/cloud_event.hpp"

#include <set>

#include <doctest/doctest.h>
#include <nlohmann/json.hpp>

#include "daemon/render/alert_json.hpp"

using namespace agreed;
using nlohmann::ordered_json;

namespace {
constexpr Instant kAt{std::chrono::milliseconds(1770271200123)};
}

TEST_CASE("a transition becomes a CloudEvent whose data is the alert") {
  AlertTransition transition;
  transition.change = AlertChange::acknowledged;
  transition.at = kAt;
  transition.alert.id = 17;
  const std::string body = alert_json(transition.alert, "http://h");
  const auto text = to_json(alert_event(transition, "urn:uuid:1", "msg_1", body));
  const auto json = ordered_json::parse(text);
  CHECK(json["specversion"] == "1.0");
  CHECK(json["id"] == "msg_1");
  CHECK(json["source"] == "urn:uuid:1");
  CHECK(json["type"] == "agreed.alert.acknowledged");
  CHECK(json["subject"] == "17");
  CHECK(json["time"] == "2026-02-05T06:00:00.123Z");
  CHECK(json["datacontenttype"] == "application/json");
  CHECK(json["data"].dump() == body);
  CHECK(json.size() == 8);
}

TEST_CASE("every change has its type") {
  std::set<std::string> types;
  for (const auto change : {AlertChange::opened, AlertChange::changed, AlertChange::acknowledged,
                            AlertChange::resolved, AlertChange::reminder})
    types.insert(event_type(change));
  CHECK(types == std::set<std::string>{"agreed.alert.opened", "agreed.alert.changed",
                                       "agreed.alert.acknowledged", "agreed.alert.resolved",
                                       "agreed.alert.reminder"});
}

TEST_CASE("heartbeat and test have no subject and name the site, whatever it is called") {
  const auto beat = ordered_json::parse(
      to_json(heartbeat_event("s", "msg_1", "Harrow \"Mill\" \xff", "{\"sequence\":7}", kAt)));
  CHECK(beat["data"]["chain"]["sequence"] == 7);
  CHECK(beat["type"] == "agreed.heartbeat");
  CHECK_FALSE(beat.contains("subject"));
  CHECK(beat["data"]["site"].get<std::string>().rfind("Harrow \"Mill\" ", 0) == 0);
  CHECK(ordered_json::parse(to_json(test_event("s", "m", "x", kAt)))["type"] == "agreed.test");
}

TEST_CASE("webhook ids are all different and hold no full stop") {
  std::set<std::string> ids;
  for (int i = 0; i < 1000; ++i) ids.insert(make_webhook_id());
  CHECK(ids.size() == 1000);
  for (const auto& id : ids) REQUIRE(id.find_first_not_of("msg_0123456789abcdef") == std::string::npos);
}
