#pragma once
// What is posted: a CloudEvents 1.0 event in structured mode, one JSON object.
#include <string>
#include <string_view>

#include "core/alert/alert.hpp"

namespace agreed {

inline constexpr const char* kCloudEventContentType = "application/cloudevents+json; charset=utf-8";

struct CloudEvent {
  std::string id;       ///< = webhook-id, the same over all retries
  std::string source;   ///< urn:uuid of the journal
  std::string type;     ///< agreed.alert.opened ... agreed.heartbeat, agreed.test
  std::string subject;  ///< the alert's id; empty: left out
  Instant time{};       ///< of the transition
  std::string data;     ///< JSON, put in as it is
};

[[nodiscard]] std::string to_json(const CloudEvent& event);

/// "agreed.alert.opened" and so on.
[[nodiscard]] std::string event_type(AlertChange change);

/// The event of a transition; `alert_body`: what alert_json made of its alert.
[[nodiscard]] CloudEvent alert_event(const AlertTransition& transition, std::string_view source,
                                     std::string_view webhook_id, std::string_view alert_body);
/// "agreed.heartbeat": says that the service lives, and where its journal stands (`chain`: JSON).
[[nodiscard]] CloudEvent heartbeat_event(std::string_view source, std::string_view webhook_id,
                                         std::string_view site, std::string_view chain, Instant now);
/// "agreed.test": what `agreed send-test` sends.
[[nodiscard]] CloudEvent test_event(std::string_view source, std::string_view webhook_id,
                                    std::string_view site, Instant now);

/// A fresh webhook-id, "msg_" and 32 hexadecimal digits from the operating system's random source.
[[nodiscard]] std::string make_webhook_id();

}  // namespace agreed
