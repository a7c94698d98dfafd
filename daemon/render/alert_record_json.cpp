#include "daemon/render/alert_record_json.hpp"

#include <charconv>
#include <stdexcept>

#include "daemon/render/json_parts.hpp"

namespace agreed {
namespace {

Json stored_alert(const std::string& body) {
  Json alert = Json::parse(body, nullptr, false);
  if (!alert.is_object()) throw std::runtime_error("a stored alert is not a JSON object");
  return alert;
}

Json history_of(const std::vector<StoredTransition>& transitions) {
  Json list = Json::array();
  for (const StoredTransition& transition : transitions) {
    const Json then = stored_alert(transition.body);
    Json entry = {{"at", to_rfc3339(transition.at)}, {"change", transition.change}};
    for (const char* field :
         {"state", "severity", "title", "acknowledged", "resolved_reason", "config_sha256"})
      entry[field] = then.contains(field) ? then.at(field) : Json(nullptr);
    list.push_back(std::move(entry));
  }
  return list;
}

Json deliveries_of(const std::vector<DeliveryRow>& deliveries) {
  Json list = Json::array();
  for (const DeliveryRow& row : deliveries)
    list.push_back({{"message", row.message},
                    {"route", row.route},
                    {"type", row.type},
                    {"state", row.state},
                    {"created_at", to_rfc3339(row.created_at)},
                    {"delivered_at", json_time(row.delivered_at)},
                    {"next_try_at", json_time(row.next_try_at)},
                    {"tries", row.tries},
                    {"last_status", row.last_status == 0 ? Json(nullptr) : Json(row.last_status)},
                    {"last_error", json_words(row.last_error)}});
  return list;
}

Json whole_alert(const AlertRecord& record) {
  Json alert = stored_alert(record.body);
  alert["history"] = history_of(record.history);
  alert["deliveries"] = deliveries_of(record.deliveries);
  return alert;
}

}  // namespace

std::string alert_record_json(const AlertRecord& record) {
  return json_text(whole_alert(record));
}

std::string alert_records_json(const std::vector<AlertRecord>& records,
                               const std::optional<std::string>& next) {
  return json_page("alerts", records, whole_alert, next);
}

std::int64_t alert_record_id(const AlertRecord& record) {
  const Json alert = stored_alert(record.body);
  const std::string text = alert.contains("id") && alert.at("id").is_string() ? alert.at("id") : "";
  std::int64_t id = 0;
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), id);
  if (error != std::errc() || end != text.data() + text.size())
    throw std::runtime_error("a stored alert has no id");
  return id;
}

}  // namespace agreed
