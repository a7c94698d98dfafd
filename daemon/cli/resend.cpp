#include "daemon/cli/resend.hpp"

#include <fmt/format.h>

#include "daemon/cli/print_json.hpp"
#include "daemon/cli/running_service.hpp"
#include "daemon/cli/with_configuration.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/printable.hpp"
#include "daemon/render/page_text.hpp"

namespace agreed {
namespace {

void say_queued(const std::string& message, const std::string& body) {
  const auto answer = nlohmann::json::parse(body, nullptr, false);
  const std::string route = answer.is_object() ? answer.value("route", "") : "";
  fmt::print("{} is queued again for route {}; its deliveries (/api/alerts) tell what becomes of it\n",
             printable(message), printable(route));
}

int resend(const ResendCommand& command, const RunningService& service) {
  const ServiceAnswer answer =
      ask(service, "POST", "/api/messages/" + path_segment(command.message) + "/resend");
  const int code = exit_code_of(answer);
  if (code != kDone) fmt::print(stderr, "agreed: {}\n", answer.trouble);
  if (command.json && code == kDone)
    print_json(nlohmann::ordered_json::parse(answer.body, nullptr, false));
  else if (command.json)
    print_json({{"error", answer.trouble}});
  else if (code == kDone)
    say_queued(command.message, answer.body);
  return code;
}

}  // namespace

int resend_command(const ResendCommand& command) {
  return with_configuration(command.config, command.json, [&](const Config& config) {
    return resend(command, {url_of(command.url, config), token_from(command.token_file)});
  });
}

}  // namespace agreed
