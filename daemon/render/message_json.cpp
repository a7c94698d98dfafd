#include "daemon/render/message_json.hpp"

#include "daemon/render/json_parts.hpp"

namespace agreed {

std::string queued_message_json(const std::string& webhook_id, const std::string& route) {
  return json_text({{"message", webhook_id}, {"route", route}, {"state", "waiting"}});
}

}  // namespace agreed
