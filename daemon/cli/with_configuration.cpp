#include "daemon/cli/with_configuration.hpp"

#include <exception>

#include <fmt/format.h>

#include "daemon/cli/print_json.hpp"
#include "daemon/cli/say_problems.hpp"
#include "daemon/exit_codes.hpp"

namespace agreed {

int telling_errors(bool json, const std::function<int()>& work) {
  const auto told = [json](const std::exception& error, ExitCode code) -> int {
    fmt::print(stderr, "agreed: {}\n", error.what());
    if (json) print_json({{"error", error.what()}});
    return code;
  };
  try {
    return work();
  } catch (const WrongUse& error) {
    return told(error, kWrongUse);
  } catch (const std::exception& error) {
    return told(error, kCouldNotDoIt);
  }
}

int with_configuration(const std::filesystem::path& file, bool json,
                       const std::function<int(const Config&)>& work) {
  const ConfigResult result = read_config(file);
  if (result.config) return telling_errors(json, [&] { return work(*result.config); });
  say_problems(result.problems, file);
  return kWrongUse;
}

}  // namespace agreed
