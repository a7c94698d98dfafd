#pragma once
// The configuration with every default filled in, for a person to read.
#include <string>

#include "config/config.hpp"

namespace agreed {

/// Several lines, each ending in a line feed. Holds no secret: of a webhook's URL only scheme, host and port
/// are shown, of a secret only whence it comes.
[[nodiscard]] std::string describe(const Config& config);

}  // namespace agreed
