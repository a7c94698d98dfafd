#pragma once
// The manual page agreed(1).
#include <string>
#include <string_view>
#include <vector>

#include "daemon/cli/command_help.hpp"

namespace agreed::manual {

/// The page of these commands (the program itself first); `date` as 2026-01-05, `version` as 0.1.0.
[[nodiscard]] std::string command_page(const std::vector<CommandHelp>& commands, std::string_view date,
                                       std::string_view version);

}  // namespace agreed::manual
