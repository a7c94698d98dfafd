#pragma once
// What is wrong with a configuration, for a person at a terminal.
#include <filesystem>
#include <vector>

#include "config/config.hpp"

namespace agreed {

/// One line each on the standard error output; `file` is what it was called.
void say_problems(const std::vector<ConfigProblem>& problems, const std::filesystem::path& file);

}  // namespace agreed
