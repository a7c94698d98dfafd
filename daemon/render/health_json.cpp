#include "daemon/render/health_json.hpp"

#include "daemon/render/json_parts.hpp"

namespace agreed {

std::string live_json() {
  return json_text(Json{{"live", true}});
}

std::string ready_json(const std::vector<std::string>& remarks) {
  return json_text(Json{{"ready", true}, {"reasons", Json::array()}, {"remarks", remarks}});
}

std::string not_ready_json(const std::vector<std::string>& reasons, const std::string& instance) {
  return json_text(Json{{"type", "about:blank"},
                        {"title", "Service Unavailable"},
                        {"status", 503},
                        {"detail", "The service is not ready."},
                        {"instance", instance.substr(0, instance.find('?'))},
                        {"ready", false},
                        {"reasons", reasons}});
}

}  // namespace agreed
