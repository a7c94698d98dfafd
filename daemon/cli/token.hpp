#pragma once
// agreed token: who may read, and who may act.
#include "daemon/cli/command_line.hpp"

namespace agreed {

/// Makes a token, prints it once and stores its hash in the tokens file; kWrongUse if the configuration names
/// none or the name cannot be had, kCouldNotDoIt if it could not be stored.
int token_command(const TokenCommand& command);

}  // namespace agreed
