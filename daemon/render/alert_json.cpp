#include "daemon/render/alert_json.hpp"

#include <charconv>
#include <stdexcept>

#include "core/base/rfc3339.hpp"
#include "daemon/render/json_parts.hpp"

namespace agreed {
namespace {
std::string url_of(const Alert& alert, std::string_view base_url) {
  const Subject& s = alert.subject;
  std::string url(base_url);
  if (!s.comparison.empty()) return url + "/comparisons/" + s.comparison;
  if (!s.analyzer.empty() && !s.standard.empty() && !s.measurand.empty())
    return url + "/charts/" + s.analyzer + "/" + s.standard + "/" + s.measurand;
  return url + "/alerts/" + std::to_string(alert.id);
}

[[noreturn]] void refuse(const std::string& field, const std::string& expected) {
  throw std::invalid_argument("alert: " + field + ": expected " + expected);
}

const Json& member(const Json& object, const char* name) {
  const auto found = object.find(name);
  if (found == object.end()) refuse(name, "a value, found none");
  return *found;
}

bool has(const Json& object, const char* name) {
  const auto found = object.find(name);
  return found != object.end() && !found->is_null();
}

std::string text_at(const Json& object, const char* name) {
  const Json& value = member(object, name);
  if (!value.is_string()) refuse(name, "a text");
  return value.get<std::string>();
}

std::string text_or_empty(const Json& object, const char* name) {
  return has(object, name) ? text_at(object, name) : std::string();
}

Instant instant_of(const Json& value, const char* name) {
  const auto parsed = value.is_string() ? parse_rfc3339(value.get<std::string>()) : std::nullopt;
  if (!parsed || !parsed->offset_given) refuse(name, "an RFC 3339 time");
  return parsed->at;
}

Instant instant_at(const Json& object, const char* name) {
  return instant_of(member(object, name), name);
}

std::optional<Instant> instant_or_none(const Json& object, const char* name) {
  if (!has(object, name)) return std::nullopt;
  return instant_at(object, name);
}

template <class Value>
Value named(const std::optional<Value>& value, const char* field, const char* expected) {
  if (!value) refuse(field, expected);
  return *value;
}

std::int64_t id_at(const Json& object) {
  const std::string text = text_at(object, "id");
  std::int64_t id = 0;
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), id);
  if (error != std::errc() || end != text.data() + text.size() || id < 1)
    refuse("id", "a whole number above 0");
  return id;
}

Subject subject_at(const Json& object) {
  const Json& json = member(object, "subject");
  if (!json.is_object()) refuse("subject", "an object");
  return {text_or_empty(json, "analyzer"), text_or_empty(json, "standard"), text_or_empty(json, "measurand"),
          text_or_empty(json, "comparison"), text_or_empty(json, "service")};
}

std::optional<Detail> detail_of(const std::string& name, const Json& value) {
  if (value.is_null()) return std::nullopt;  // was not finite
  if (value.is_number()) return value.get<double>();
  if (value.is_string()) return value.get<std::string>();
  if (!value.is_array()) refuse("details." + name, "a number, a text or a list of texts");
  std::vector<std::string> list;
  for (const auto& entry : value) {
    if (!entry.is_string()) refuse("details." + name, "a list of texts");
    list.push_back(entry.get<std::string>());
  }
  return list;
}

Details details_at(const Json& object) {
  const Json& json = member(object, "details");
  if (!json.is_object()) refuse("details", "an object");
  Details details;
  for (const auto& [name, value] : json.items())
    if (auto detail = detail_of(name, value)) details.emplace_back(name, std::move(*detail));
  return details;
}

std::optional<Acknowledgement> acknowledged_at(const Json& object) {
  if (!has(object, "acknowledged")) return std::nullopt;
  const Json& json = object["acknowledged"];
  if (!json.is_object()) refuse("acknowledged", "an object or null");
  return Acknowledgement{text_at(json, "by"), instant_at(json, "at"), text_at(json, "note")};
}

std::optional<Period> between_at(const Json& object) {
  if (!has(object, "started_between")) return std::nullopt;
  const Json& json = object["started_between"];
  if (!json.is_array() || json.size() != 2) refuse("started_between", "two times or null");
  return Period{instant_of(json[0], "started_between"), instant_of(json[1], "started_between")};
}

std::optional<AlertChange> held_at(const Json& object) {
  if (!has(object, "held")) return std::nullopt;  // also of journals from before it was written
  const std::string word = text_at(object, "held");
  for (const AlertChange change : {AlertChange::opened, AlertChange::changed})
    if (word == to_string(change)) return change;
  refuse("held", "opened, changed or null");
}

Alert alert_of(const Json& json) {
  if (!json.is_object()) refuse("the whole", "an object");
  Alert alert;
  alert.id = id_at(json);
  alert.kind = named(alert_kind_from(text_at(json, "kind")), "kind", "a kind of alert");
  alert.subject = subject_at(json);
  alert.severity = named(severity_from(text_at(json, "severity")), "severity", "notice, warning or critical");
  alert.state = named(alert_state_from(text_at(json, "state")), "state", "open, acknowledged or resolved");
  alert.title = text_at(json, "title");
  alert.text = text_at(json, "text");
  alert.opened_at = instant_at(json, "opened_at");
  alert.changed_at = instant_at(json, "changed_at");
  alert.resolved_at = instant_or_none(json, "resolved_at");
  alert.resolved_reason = text_or_empty(json, "resolved_reason");
  alert.acknowledged = acknowledged_at(json);
  alert.started_between = between_at(json);
  alert.details = details_at(json);
  alert.started_at = instant_or_none(json, "started_at");
  alert.told_at = instant_at(json, "told_at");
  alert.held = held_at(json);
  return alert;
}

}  // namespace

std::string alert_json(const Alert& alert, std::string_view base_url, std::string_view config_sha256) {
  Json json;
  json["id"] = std::to_string(alert.id);
  json["kind"] = to_string(alert.kind);
  json["subject"] = json_subject(alert.subject);
  json["severity"] = to_string(alert.severity);
  json["state"] = to_string(alert.state);
  json["title"] = alert.title;
  json["text"] = alert.text;
  json["opened_at"] = to_rfc3339(alert.opened_at);
  json["changed_at"] = to_rfc3339(alert.changed_at);
  json["resolved_at"] = json_time(alert.resolved_at);
  json["resolved_reason"] = json_words(alert.resolved_reason);
  json["acknowledged"] = nullptr;
  if (const auto& seen = alert.acknowledged)
    json["acknowledged"] = Json{{"by", seen->by}, {"at", to_rfc3339(seen->at)}, {"note", seen->note}};
  json["started_between"] = json_period(alert.started_between);
  json["details"] = json_details(alert.details);
  json["url"] = url_of(alert, base_url);
  json["started_at"] = json_time(alert.started_at);
  json["told_at"] = to_rfc3339(alert.told_at);
  json["held"] = alert.held ? Json(to_string(*alert.held)) : Json(nullptr);
  json["config_sha256"] = json_words(std::string(config_sha256));
  return json_text(json);
}

Alert alert_from_json(std::string_view text) {
  // Nothing of ours nests deeper; what nests for ever would overflow the stack later.
  constexpr int deepest = 8;
  const auto not_too_deep = [](int depth, Json::parse_event_t, Json&) {
    if (depth > deepest) refuse("the whole", "at most 8 levels");
    return true;
  };
  Json json;
  try {
    json = Json::parse(text, not_too_deep);
  } catch (const Json::exception& error) {
    throw std::invalid_argument(std::string("alert: not JSON: ") + error.what());
  }
  return alert_of(json);
}

}  // namespace agreed
