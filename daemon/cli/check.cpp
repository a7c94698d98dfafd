#include "daemon/cli/check.hpp"

#include <cstdlib>
#include <exception>
#include <vector>

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "config/config.hpp"
#include "config/describe.hpp"
#include "daemon/cli/check_sample.hpp"
#include "daemon/cli/print_json.hpp"
#include "daemon/cli/say_problems.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/http/tokens.hpp"
#include "daemon/webhook/secrets.hpp"

namespace agreed {
namespace {

void print_result(const ConfigResult& result) {
  nlohmann::ordered_json problems = nlohmann::ordered_json::array();
  for (const ConfigProblem& problem : result.problems)
    problems.push_back({{"line", problem.line},
                        {"column", problem.column},
                        {"key", problem.key},
                        {"message", problem.message},
                        {"warning", problem.warning}});
  const nlohmann::ordered_json answer{{"valid", result.config.has_value()}, {"problems", problems}};
  print_json(answer);
}

/// What would keep `run` from starting: secrets that cannot be used. A variable is the service's own, so one
/// that is not set here is only doubtful.
void add_secret_problems(ConfigResult& result) {
  const std::vector<Route> routes = result.config->routes;
  for (const Route& route : routes) {
    try {
      (void)load_signing_keys(route);
    } catch (const std::exception& error) {
      const bool unset = route.secret_env &&
                         std::getenv(route.secret_env->c_str()) == nullptr;  // NOLINT(concurrency-mt-unsafe)
      result.problems.push_back({.key = "alerts.routes", .message = error.what(), .warning = unset});
      if (!unset) result.config.reset();
    }
  }
}

/// Without tokens the service runs as ever but for who asks it.
void add_token_problems(ConfigResult& result) {
  const auto add = [&](const std::string& words) {
    result.problems.push_back({.key = "access.tokens_file", .message = words, .warning = true});
  };
  (void)Tokens(result.config->tokens_file, add).trouble();
}

}  // namespace

int check_configuration(const CheckCommand& command) {
  const std::filesystem::path& file = command.config;
  const bool json = command.json;
  ConfigResult result = read_config(file);
  if (result.config) add_token_problems(result);
  if (result.config) add_secret_problems(result);
  const bool sample_wanted = !command.sample.empty() && result.config;
  if (sample_wanted) return check_sample(*result.config, command.sample, command.analyzer, json);
  if (json) {
    print_result(result);
  } else {
    say_problems(result.problems, file);
    if (result.config) fmt::print("{}", describe(*result.config));
  }
  return result.config ? kDone : kWrongUse;
}

}  // namespace agreed
