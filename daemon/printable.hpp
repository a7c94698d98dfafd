#pragma once
// Bytes from outside (file names, notes) as text that is safe to show and to log.
#include <string>
#include <string_view>

namespace agreed {

/// Valid UTF-8 without control characters passes; every other byte becomes \xNN.
[[nodiscard]] std::string printable(std::string_view bytes);

}  // namespace agreed
