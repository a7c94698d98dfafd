#include "daemon/intake/text.hpp"

#include <algorithm>
#include <array>
#include <cstdio>

namespace agreed {
namespace {

constexpr std::size_t kShown = 60;

bool is_follower(std::string_view text, std::size_t at) {
  return at < text.size() && (static_cast<unsigned char>(text[at]) & 0xC0U) == 0x80U;
}

/// Length of the clean character at `at`: 0 if it is a control character or no UTF-8 (RFC 3629 section 4).
std::size_t clean_length(std::string_view text, std::size_t at) {
  const auto lead = static_cast<unsigned char>(text[at]);
  if (lead < 0x80) return lead >= 0x20 && lead != 0x7F ? 1 : 0;
  if (lead < 0xC2 || lead > 0xF4 || !is_follower(text, at + 1)) return 0;
  const auto second = static_cast<unsigned char>(text[at + 1]);
  if (lead < 0xE0) return lead == 0xC2 && second < 0xA0 ? 0 : 2;
  if (!is_follower(text, at + 2)) return 0;
  if (lead < 0xF0) {
    const bool overlong = lead == 0xE0 && second < 0xA0;
    const bool surrogate = lead == 0xED && second > 0x9F;
    return overlong || surrogate ? 0 : 3;
  }
  if (!is_follower(text, at + 3)) return 0;
  const bool overlong = lead == 0xF0 && second < 0x90;
  const bool beyond = lead == 0xF4 && second > 0x8F;
  return overlong || beyond ? 0 : 4;
}

char lower(char c) {
  return c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c;
}

}  // namespace

bool is_clean_text(std::string_view text) {
  for (std::size_t at = 0; at < text.size();) {
    const std::size_t length = clean_length(text, at);
    if (length == 0) return false;
    at += length;
  }
  return true;
}

std::string escaped(std::string_view text) {
  std::string clean;
  clean.reserve(text.size());
  for (std::size_t at = 0; at < text.size();) {
    const std::size_t length = text[at] == '\\' ? 0 : clean_length(text, at);
    if (length > 0) {
      clean.append(text.substr(at, length));
      at += length;
      continue;
    }
    std::array<char, 8> code{};
    std::snprintf(code.data(), code.size(), "\\x%02X",
                  static_cast<unsigned>(static_cast<unsigned char>(text[at])));
    clean += code.data();
    ++at;
  }
  return clean;
}

std::string in_quotes(std::string_view text) {
  if (text.size() <= kShown) return '"' + escaped(text) + '"';
  std::size_t cut = kShown;
  while (cut > kShown - 3 && is_follower(text, cut)) --cut;  // not in the middle of a character
  return '"' + escaped(text.substr(0, cut)) + "...\"";
}

std::string_view trimmed(std::string_view text) {
  const std::size_t first = text.find_first_not_of(" \t");
  if (first == std::string_view::npos) return {};
  return text.substr(first, text.find_last_not_of(" \t") - first + 1);
}

bool ends_with_word(std::string_view text, std::string_view end) {
  if (text.size() < end.size()) return false;
  const std::string_view tail = text.substr(text.size() - end.size());
  return std::equal(tail.begin(), tail.end(), end.begin(),
                    [](char a, char b) { return lower(a) == lower(b); });
}

}  // namespace agreed
