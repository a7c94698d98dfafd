#include "daemon/cli/say_problems.hpp"

#include <fmt/format.h>

namespace agreed {

void say_problems(const std::vector<ConfigProblem>& problems, const std::filesystem::path& file) {
  for (const ConfigProblem& problem : problems) fmt::print(stderr, "{}\n", to_string(problem, file));
}

}  // namespace agreed
