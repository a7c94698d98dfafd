#pragma once
// agreed replay: old readings through a configuration, and its alerts beside those raised then.
#include "daemon/cli/command_line.hpp"

namespace agreed {

int replay_command(const ReplayCommand& command);

}  // namespace agreed
