#pragma once
// Letters, digits and blanks of ASCII, whatever the locale; bytes beyond ASCII are left as they are.
#include <string>
#include <string_view>

namespace agreed::ascii {

[[nodiscard]] constexpr bool is_digit(char c) {
  return c >= '0' && c <= '9';
}
[[nodiscard]] constexpr bool is_letter_or_digit(char c) {
  return is_digit(c) || (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z');
}
[[nodiscard]] constexpr char lower(char c) {
  return c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c;
}
[[nodiscard]] std::string lower(std::string_view text);
/// Equal but for the case of letters.
[[nodiscard]] bool same_letters(std::string_view a, std::string_view b);
/// Without the `blanks` at its beginning and end.
[[nodiscard]] std::string_view trimmed(std::string_view text, std::string_view blanks = " \t");

}  // namespace agreed::ascii
