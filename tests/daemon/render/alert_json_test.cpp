#include "daemon/render/alert_json.hpp"

#include <cmath>
#include <cstring>
#include <limits>
#include <random>
#include <stdexcept>

#include <doctest/doctest.h>
#include <nlohmann/json.hpp>

using namespace agreed;

namespace {

constexpr Instant at(std::int64_t ms) {
  return Instant{Duration(1770271200000 + ms)};
}

Alert full_alert() {
  Alert alert;
  alert.id = 17;
  alert.kind = AlertKind::check_standard_unstable;
  alert.subject = {"line1", "wheat-low", "protein", "", ""};
  alert.severity = Severity::warning;
  alert.state = AlertState::resolved;
  alert.title = "A \"title\"";
  alert.text = "Zwei\nZeilen: äöü </script>";
  alert.opened_at = at(0);
  alert.changed_at = at(1001);
  alert.resolved_at = at(1001);
  alert.resolved_reason = "ended";
  alert.acknowledged = Acknowledgement{"M. Byrne", at(5), ""};
  alert.started_at = at(-10);
  alert.started_between = Period{at(-20), at(-1)};
  alert.details = {{"pattern", "shift"},   {"shift", 0.1},
                   {"a_third", 1.0 / 3.0}, {"samples", std::vector<std::string>{"S-1", "S-2"}},
                   {"count", 2.0},         {"nothing", std::vector<std::string>{}}};
  alert.told_at = at(7);
  alert.held = AlertChange::changed;
  return alert;
}

std::string key_order(const nlohmann::ordered_json& json) {
  std::string keys;
  for (const auto& [key, value] : json.items()) keys += key + " ";
  return keys;
}

}  // namespace

TEST_CASE("an alert comes back from its JSON as it was") {
  const Alert full = full_alert();
  CHECK(alert_from_json(alert_json(full, "http://127.0.0.1:7480")) == full);
  Alert plain;
  plain.id = 1;
  plain.kind = AlertKind::storage_low;
  plain.subject.service = "agreed";
  CHECK(alert_from_json(alert_json(plain, "")) == plain);
}

TEST_CASE("numbers in the details keep every bit") {
  std::mt19937_64 random(20260205);
  for (int i = 0; i < 2000; ++i) {
    Alert alert = full_alert();
    const auto bits = random();
    double value = 0;
    static_assert(sizeof value == sizeof bits);
    std::memcpy(&value, &bits, sizeof value);
    if (!std::isfinite(value)) continue;
    alert.details = {{"value", value}};
    CAPTURE(value);
    REQUIRE(alert_from_json(alert_json(alert, "")) == alert);
  }
}

TEST_CASE("fields stand in the order of the API") {
  const auto json = nlohmann::ordered_json::parse(alert_json(full_alert(), "http://h"));
  CHECK(key_order(json) ==
        "id kind subject severity state title text opened_at changed_at resolved_at resolved_reason "
        "acknowledged started_between details url started_at told_at held config_sha256 ");
  CHECK(json["id"] == "17");
  CHECK(json["opened_at"] == "2026-02-05T06:00:00.000Z");
  CHECK(key_order(json["subject"]) == "analyzer standard measurand ");
  CHECK(key_order(json["acknowledged"]) == "by at note ");
  CHECK(key_order(json["details"]) == "pattern shift a_third samples count nothing ");
}

TEST_CASE("absent is null, and the subject has only its own keys") {
  Alert alert;
  alert.id = 3;
  alert.kind = AlertKind::agreement_lost;
  alert.subject.comparison = "protein";
  const auto json = nlohmann::ordered_json::parse(alert_json(alert, ""));
  for (const char* name :
       {"resolved_at", "resolved_reason", "acknowledged", "started_between", "started_at"}) {
    CAPTURE(name);
    CHECK(json.at(name).is_null());
  }
  CHECK(json["subject"].dump() == R"({"comparison":"protein"})");
  CHECK(json["details"].dump() == "{}");
}

TEST_CASE("the link leads to the chart, the comparison, or the alert itself") {
  const auto url = [](const Subject& subject) {
    Alert alert;
    alert.id = 9;
    alert.subject = subject;
    return nlohmann::json::parse(alert_json(alert, "http://mill:7480")).at("url").get<std::string>();
  };
  CHECK(url({"line1", "wheat-low", "protein", "", ""}) == "http://mill:7480/charts/line1/wheat-low/protein");
  CHECK(url({"", "", "", "protein", ""}) == "http://mill:7480/comparisons/protein");
  CHECK(url({"line1", "", "", "", ""}) == "http://mill:7480/alerts/9");
  CHECK(url({"", "", "", "", "agreed"}) == "http://mill:7480/alerts/9");
}

TEST_CASE("neither a number that is not finite nor a broken character makes broken JSON") {
  Alert alert = full_alert();
  alert.text = "file \xff\xfe";
  alert.details = {{"nan", std::numeric_limits<double>::quiet_NaN()},
                   {"inf", -std::numeric_limits<double>::infinity()},
                   {"file", "\xc3"}};
  const auto json = nlohmann::json::parse(alert_json(alert, ""));
  CHECK(json["details"]["nan"].is_null());
  CHECK(json["details"]["inf"].is_null());
  CHECK(alert_from_json(alert_json(alert, "")).details.size() == 1);
}

TEST_CASE("what is not an alert is refused with the field's name") {
  const auto broken = [](const char* field, const nlohmann::json& value) {
    auto json = nlohmann::json::parse(alert_json(full_alert(), ""));
    json[field] = value;
    return json.dump();
  };
  const auto refusal = [](const std::string& text) -> std::string {
    try {
      (void)alert_from_json(text);
    } catch (const std::invalid_argument& error) {
      return error.what();
    }
    return "";
  };
  CHECK(refusal("{").find("not JSON") != std::string::npos);
  CHECK(refusal("[]").find("object") != std::string::npos);
  CHECK(refusal(std::string(100000, '[')).find("levels") != std::string::npos);
  for (const auto& [field, value] :
       std::vector<std::pair<const char*, nlohmann::json>>{{"id", "x"},
                                                           {"id", 17},
                                                           {"id", "0"},
                                                           {"kind", "fire"},
                                                           {"subject", "line1"},
                                                           {"severity", "mild"},
                                                           {"state", "gone"},
                                                           {"title", nullptr},
                                                           {"opened_at", "yesterday"},
                                                           {"opened_at", "2026-02-05T06:00:00"},
                                                           {"acknowledged", true},
                                                           {"started_between", {"2026-02-05T06:00:00Z"}},
                                                           {"details", nlohmann::json::array()},
                                                           {"told_at", nullptr},
                                                           {"held", "resolved"}}) {
    CAPTURE(field);
    CHECK(refusal(broken(field, value)).find(field) != std::string::npos);
  }
  auto missing = nlohmann::json::parse(alert_json(full_alert(), ""));
  missing.erase("held");  // journals from before it was written have none
  CHECK_FALSE(alert_from_json(missing.dump()).held);
  missing.erase("told_at");
  CHECK(refusal(missing.dump()).find("told_at") != std::string::npos);
}

TEST_CASE("fields from elsewhere are passed over") {
  auto json = nlohmann::json::parse(alert_json(full_alert(), ""));
  json["history"] = nlohmann::json::array({1, 2});
  CHECK(alert_from_json(json.dump()).id == 17);
}
