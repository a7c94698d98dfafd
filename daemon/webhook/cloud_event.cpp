#include "daemon/webhook/cloud_event.hpp"

#include <array>
#include <stdexcept>

#include <nlohmann/json.hpp>
#include <openssl/rand.h>

#include "core/base/rfc3339.hpp"
#include "daemon/hex.hpp"

namespace agreed {
namespace {
using Json = nlohmann::ordered_json;

std::string json_string(std::string_view text) {
  return Json(text).dump(-1, ' ', false, Json::error_handler_t::replace);
}

/// Without its last bracket.
std::string site_data(std::string_view site, Instant now) {
  return "{\"site\":" + json_string(site) + ",\"at\":" + json_string(to_rfc3339(now));
}

CloudEvent service_event(const char* type, std::string_view source, std::string_view webhook_id,
                         std::string_view site, Instant now) {
  return {std::string(webhook_id), std::string(source), type, "", now, site_data(site, now) + "}"};
}

}  // namespace

std::string to_json(const CloudEvent& event) {
  std::string json = "{\"specversion\":\"1.0\"";
  const auto put = [&](const char* name, const std::string& value) {
    json.append(",\"").append(name).append("\":").append(value);
  };
  put("id", json_string(event.id));
  put("source", json_string(event.source));
  put("type", json_string(event.type));
  if (!event.subject.empty()) put("subject", json_string(event.subject));
  put("time", json_string(to_rfc3339(event.time)));
  put("datacontenttype", json_string("application/json"));
  put("data", event.data);
  return json + "}";
}

std::string event_type(AlertChange change) {
  return std::string("agreed.alert.") + to_string(change);
}

CloudEvent alert_event(const AlertTransition& transition, std::string_view source,
                       std::string_view webhook_id, std::string_view alert_body) {
  return {std::string(webhook_id),
          std::string(source),
          event_type(transition.change),
          std::to_string(transition.alert.id),
          transition.at,
          std::string(alert_body)};
}

CloudEvent heartbeat_event(std::string_view source, std::string_view webhook_id, std::string_view site,
                           std::string_view chain, Instant now) {
  CloudEvent event = service_event("agreed.heartbeat", source, webhook_id, site, now);
  event.data = site_data(site, now).append(",\"chain\":").append(chain) + "}";
  return event;
}

CloudEvent test_event(std::string_view source, std::string_view webhook_id, std::string_view site,
                      Instant now) {
  return service_event("agreed.test", source, webhook_id, site, now);
}

std::string make_webhook_id() {
  std::array<unsigned char, 16> bytes{};
  if (RAND_bytes(bytes.data(), static_cast<int>(bytes.size())) != 1)
    throw std::runtime_error("the system gives no random bytes for a webhook id");
  return "msg_" + to_hex(bytes);
}

}  // namespace agreed
