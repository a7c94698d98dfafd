#pragma once
// agreed check --sample: how would this file be read?
#include <filesystem>
#include <string>

#include "config/config.hpp"

namespace agreed {

/// Prints each row as it would be read, or why not, and takes nothing in. The exit code: 1 if the file would
/// not be taken, or any of its rows cannot be used.
int check_sample(const Config& config, const std::filesystem::path& sample, const std::string& analyzer,
                 bool json);

}  // namespace agreed
