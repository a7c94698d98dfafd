#pragma once
// What is answered when a message is sent again.
#include <string>

namespace agreed {

/// {"message": webhook-id, "route": ..., "state": "waiting"}.
[[nodiscard]] std::string queued_message_json(const std::string& webhook_id, const std::string& route);

}  // namespace agreed
