#pragma once
// UTF-8, byte by byte.
#include <cstddef>
#include <string_view>

namespace agreed {

/// Length of the well-formed character `text` begins with (RFC 3629: no surrogates, nothing overlong, nothing
/// beyond U+10FFFF); 0 if it begins with none.
[[nodiscard]] std::size_t utf8_length(std::string_view text);

}  // namespace agreed
