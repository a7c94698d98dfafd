#pragma once
// Small helpers for text that comes from files.
#include <string>
#include <string_view>

namespace agreed {

/// The beginning of `text` (at most 60 bytes), made printable, in double quotes, for messages.
[[nodiscard]] std::string in_quotes(std::string_view text);

/// True if `text` ends with `end`, ASCII letters compared without case.
[[nodiscard]] bool ends_with_word(std::string_view text, std::string_view end);

}  // namespace agreed
