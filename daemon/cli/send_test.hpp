#pragma once
// agreed send-test: does a webhook arrive?
#include "daemon/cli/command_line.hpp"

namespace agreed {

/// Posts one agreed.test event to the route named, or to each, and prints the answers. kDone: all took it;
/// kAnswerIsNo: one did not; kWrongUse: no such route, or the configuration or a route's secret is wrong.
int send_test_command(const SendTestCommand& command);

}  // namespace agreed
