#pragma once
// agreed check: is this configuration right, and what does it come to?
#include "daemon/cli/command_line.hpp"

namespace agreed {

/// Prints every problem, or the values in effect, or how the sample would be read; the exit code.
int check_configuration(const CheckCommand& command);

}  // namespace agreed
