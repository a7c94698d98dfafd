#pragma once
// Foreign bytes: are they text a person may read, and how are they shown when they are not.
#include <string>
#include <string_view>

namespace agreed {

/// UTF-8 without control characters (C0, DEL and C1).
[[nodiscard]] bool is_clean_text(std::string_view text);

/// `text` with control characters, backslashes and bytes that are no UTF-8 written as \xNN: clean, one line.
[[nodiscard]] std::string escaped(std::string_view text);

/// The beginning of `text` (at most 60 bytes), escaped and in double quotes, for messages.
[[nodiscard]] std::string in_quotes(std::string_view text);

/// `text` without spaces and tabs at its ends.
[[nodiscard]] std::string_view trimmed(std::string_view text);

/// True if `text` ends with `end`, ASCII letters compared without case.
[[nodiscard]] bool ends_with_word(std::string_view text, std::string_view end);

}  // namespace agreed
