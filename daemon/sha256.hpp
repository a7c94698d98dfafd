#pragma once
// SHA-256 of text in memory.
#include <span>
#include <string>
#include <string_view>

namespace agreed {

[[nodiscard]] std::string to_hex(std::span<const unsigned char> bytes);
[[nodiscard]] std::string sha256_hex(std::string_view text);

}  // namespace agreed
