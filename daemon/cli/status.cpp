#include "daemon/cli/status.hpp"

#include <cstdlib>
#include <string_view>

#include <fmt/format.h>
#include <unistd.h>

#include "daemon/cli/print_json.hpp"
#include "daemon/cli/running_service.hpp"
#include "daemon/cli/with_configuration.hpp"
#include "daemon/clock.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/render/status_text.hpp"

namespace agreed {
namespace {

bool is_url(std::string_view text) {
  return text.rfind("http://", 0) == 0 || text.rfind("https://", 0) == 0;
}

/// On a terminal that has colours, unless somebody asked for none (https://no-color.org).
bool colour_wanted() {
  const auto variable = [](const char* name) {
    const char* const value = std::getenv(name);  // NOLINT(concurrency-mt-unsafe): nobody here sets any
    return std::string_view(value == nullptr ? "" : value);
  };
  return ::isatty(STDOUT_FILENO) == 1 && variable("NO_COLOR").empty() && variable("TERM") != "dumb";
}

int show(const RunningService& service, bool json) {
  const ServiceAnswer status = ask(service, "GET", "/api/status");
  if (const int code = exit_code_of(status); code != kDone) {
    fmt::print(stderr, "agreed: {}\n", status.trouble);
    if (json) print_json({{"error", status.trouble}});
    return code == kAnswerIsNo ? static_cast<int>(kCouldNotDoIt)
                               : code;  // "no" is said of what agrees, not of a wrong path
  }
  const ServiceAnswer alerts = ask(service, "GET", "/api/alerts?state=open,acknowledged&limit=5");
  StatusText shown;
  try {
    shown = status_text({status.body, alerts.body, service.url}, now_utc(), !json && colour_wanted());
  } catch (const std::invalid_argument&) {
    throw std::runtime_error("what answers at " + service.url + " is not agreed");
  }
  if (json)
    print_json(nlohmann::ordered_json::parse(status.body));
  else
    fmt::print("{}", shown.text);
  return shown.everything_agrees ? kDone : kAnswerIsNo;
}

}  // namespace

int status_command(const StatusCommand& command) {
  if (!is_url(command.target))
    return with_configuration(command.target, command.json, [&](const Config& config) {
      return show({url_of("", config), token_from(command.token_file)}, command.json);
    });
  return telling_errors(command.json, [&] {
    const std::string url = command.target.substr(0, command.target.find_last_not_of('/') + 1);
    return show({url, token_from(command.token_file)}, command.json);
  });
}

}  // namespace agreed
