#pragma once
// agreed resend: a message is sent once more.
#include "daemon/cli/command_line.hpp"

namespace agreed {

/// Asks the running service; kDone: it is queued; kAnswerIsNo: unknown, or it waits anyway; kWrongUse: no
/// token that may; kCouldNotDoIt: the service cannot be reached.
int resend_command(const ResendCommand& command);

}  // namespace agreed
