#pragma once
// Bytes as lower-case hexadecimal digits.
#include <span>
#include <string>

namespace agreed {

[[nodiscard]] std::string to_hex(std::span<const unsigned char> bytes);

}  // namespace agreed
