#pragma once
// Is it text?
#include <cstddef>
#include <optional>
#include <string_view>

namespace agreed::settings_file {

/// Offset of the first byte that is not well-formed UTF-8 (RFC 3629: no surrogates, nothing overlong, nothing
/// beyond U+10FFFF); nothing if all is.
[[nodiscard]] std::optional<std::size_t> first_bad_utf8(std::string_view text);

/// Offset of the first control character other than tab, line feed and carriage return.
[[nodiscard]] std::optional<std::size_t> first_control(std::string_view text);

}  // namespace agreed::settings_file
