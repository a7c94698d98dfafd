#include "daemon/cli/with_configuration.hpp"

#include <exception>

#include <fmt/format.h>

#include "daemon/cli/print_json.hpp"
#include "daemon/cli/say_problems.hpp"
#include "daemon/exit_codes.hpp"

namespace agreed {

int with_configuration(const std::filesystem::path& file, bool json,
                       const std::function<int(const Config&)>& work) {
  const ConfigResult result = read_config(file);
  if (!result.config) {
    say_problems(result.problems, file);
    return kWrongUse;
  }
  try {
    return work(*result.config);
  } catch (const std::exception& error) {
    fmt::print(stderr, "agreed: {}\n", error.what());
    if (json) print_json({{"error", error.what()}});
    return kCouldNotDoIt;
  }
}

}  // namespace agreed
