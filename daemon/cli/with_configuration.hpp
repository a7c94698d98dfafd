#pragma once
// What every command does that works with a configuration and is not the service.
#include <filesystem>
#include <functional>

#include "config/config.hpp"

namespace agreed {

/// Reads the configuration and does `work` with it; its exit status is that of the command. A wrong
/// configuration is told on the standard error output (kWrongUse), and so is what `work` throws
/// (kCouldNotDoIt; with `json` also as {"error": ...} on the standard output).
int with_configuration(const std::filesystem::path& file, bool json,
                       const std::function<int(const Config&)>& work);

}  // namespace agreed
