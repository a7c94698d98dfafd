#include "daemon/cli/check.hpp"

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "config/config.hpp"
#include "config/describe.hpp"
#include "daemon/cli/check_sample.hpp"
#include "daemon/cli/print_json.hpp"
#include "daemon/cli/say_problems.hpp"
#include "daemon/exit_codes.hpp"

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

}  // namespace

int check_configuration(const CheckCommand& command) {
  const std::filesystem::path& file = command.config;
  const bool json = command.json;
  const ConfigResult result = read_config(file);
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
