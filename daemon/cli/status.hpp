#pragma once
// agreed status: what the running service says, in one screen.
#include "daemon/cli/command_line.hpp"

namespace agreed {

/// kDone: everything agrees; kAnswerIsNo: not; kWrongUse: a wrong configuration, or no token that may read;
/// kCouldNotDoIt: the service cannot be reached.
int status_command(const StatusCommand& command);

}  // namespace agreed
