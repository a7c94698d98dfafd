#include "daemon/cli/send_test.hpp"

#include <algorithm>
#include <chrono>

#include <fmt/format.h>

#include "config/nearest.hpp"
#include "daemon/cli/print_json.hpp"
#include "daemon/cli/with_configuration.hpp"
#include "daemon/clock.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/journal/journal.hpp"
#include "daemon/journal/verify.hpp"
#include "daemon/webhook/backoff.hpp"
#include "daemon/webhook/cloud_event.hpp"
#include "daemon/webhook/endpoint.hpp"

namespace agreed {
namespace {

// Before the first start of the service there is no source yet: the nil UUID (RFC 9562, 5.9).
constexpr const char* kNoSourceYet = "urn:uuid:00000000-0000-0000-0000-000000000000";

struct Tested {
  std::string route, id;
  bool delivered = false, secret_missing = false;
  int status = 0;     ///< 0: no answer
  std::string error;  ///< why not; empty when delivered
  std::int64_t took_ms = 0;
};

std::string source_of(const Config& config) {
  if (!std::filesystem::exists(database_of(config.state))) return kNoSourceYet;
  return JournalReader(config.state).source();
}

/// One try, as the sender makes it.
Tested test(const Endpoint& endpoint, const std::string& source, const std::string& site) {
  Tested tested{.route = endpoint.route, .id = make_webhook_id(), .error = {}};
  const Instant now = now_utc();
  const auto begun = std::chrono::steady_clock::now();
  const CallAnswer answer =
      deliver(endpoint, tested.id, to_json(test_event(source, tested.id, site, now)), now, {}, {});
  tested.took_ms = std::chrono::round<Duration>(std::chrono::steady_clock::now() - begun).count();
  const DeliveryTry result = judge({}, {answer.status, answer.error, {}}, now, 0, {});
  tested.delivered = result.delivered;
  tested.status = result.status;
  tested.error = result.error;
  return tested;
}

Tested test(const Route& route, const std::string& source, const std::string& site) {
  Endpoint endpoint;
  try {
    endpoint = endpoint_of(route);
  } catch (const std::runtime_error& error) {
    return {.route = route.name, .id = {}, .secret_missing = true, .error = error.what()};
  }
  return test(endpoint, source, site);
}

nlohmann::ordered_json to_json(const Tested& tested) {
  nlohmann::ordered_json json{{"route", tested.route}, {"delivered", tested.delivered}};
  json["message"] = tested.id.empty() ? nlohmann::ordered_json() : nlohmann::ordered_json(tested.id);
  json["status"] = tested.status == 0 ? nlohmann::ordered_json() : nlohmann::ordered_json(tested.status);
  json["took_ms"] = tested.took_ms;
  json["error"] = tested.error.empty() ? nlohmann::ordered_json() : nlohmann::ordered_json(tested.error);
  return json;
}

void say(const Tested& tested) {
  if (tested.delivered)
    fmt::print("{}: delivered, answered {} after {} ms ({})\n", tested.route, tested.status, tested.took_ms,
               tested.id);
  else if (tested.secret_missing)
    fmt::print("{}: NOT sent: {}\n", tested.route, tested.error);
  else
    fmt::print("{}: NOT delivered: {}, after {} ms ({})\n", tested.route, tested.error, tested.took_ms,
               tested.id);
  std::fflush(stdout);
}

/// The routes meant; none, and told, if there is no such route.
std::vector<Route> routes_meant(const Config& config, const std::string& name) {
  if (name.empty() && config.routes.empty())
    fmt::print(stderr, "agreed: there is no route to test: alerts.routes of the configuration is empty\n");
  if (name.empty()) return config.routes;
  std::vector<std::string> names;
  for (const Route& route : config.routes) {
    if (route.name == name) return {route};
    names.push_back(route.name);
  }
  fmt::print(stderr, "agreed: there is no route '{}'{}\nroutes: {}\n", name,
             settings_file::did_you_mean(name, names), settings_file::enumerated(names));
  return {};
}

int exit_code(const Tested& tested) {
  if (tested.secret_missing) return kWrongUse;
  return tested.delivered ? kDone : kAnswerIsNo;
}

}  // namespace

int send_test_command(const SendTestCommand& command) {
  return with_configuration(command.config, command.json, [&](const Config& config) {
    const std::vector<Route> routes = routes_meant(config, command.route);
    if (routes.empty()) return static_cast<int>(kWrongUse);
    const std::string source = source_of(config);
    int code = kDone;
    nlohmann::ordered_json results = nlohmann::ordered_json::array();
    for (const Route& route : routes) {
      const Tested tested = test(route, source, config.settings->site);
      code = std::max(code, exit_code(tested));
      if (command.json)
        results.push_back(to_json(tested));
      else
        say(tested);
    }
    if (command.json) print_json({{"delivered", code == kDone}, {"routes", results}});
    return code;
  });
}

}  // namespace agreed
