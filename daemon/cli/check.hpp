#pragma once
// agreed check: is this configuration right, and what does it come to?
#include <filesystem>

namespace agreed {

/// Prints every problem, or the values in effect; the exit code.
int check_configuration(const std::filesystem::path& config, bool json);

}  // namespace agreed
