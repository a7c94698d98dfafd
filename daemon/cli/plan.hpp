#pragma once
// agreed plan: what a configuration will do, and which setting meets a wish.
#include "daemon/cli/command_line.hpp"

namespace agreed {

int plan_command(const PlanCommand& command);

}  // namespace agreed
