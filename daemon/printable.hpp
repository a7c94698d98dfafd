#pragma once
// Bytes from outside (file names, notes, cells) as text that is safe to show and to log.
#include <string>
#include <string_view>

namespace agreed {

/// UTF-8 without control characters (C0, DEL and C1).
[[nodiscard]] bool is_clean_text(std::string_view text);

/// `bytes` with control characters, backslashes and whatever is no UTF-8 written as \xNN: clean, one line.
[[nodiscard]] std::string printable(std::string_view bytes);

}  // namespace agreed
