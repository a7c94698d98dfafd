#include "daemon/intake/text.hpp"

#include <algorithm>

#include "daemon/printable.hpp"

namespace agreed {
namespace {

constexpr std::size_t kShown = 60;

bool is_follower(std::string_view text, std::size_t at) {
  return at < text.size() && (static_cast<unsigned char>(text[at]) & 0xC0U) == 0x80U;
}

char lower(char c) {
  return c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c;
}

}  // namespace

std::string in_quotes(std::string_view text) {
  if (text.size() <= kShown) return '"' + printable(text) + '"';
  std::size_t cut = kShown;
  while (cut > kShown - 3 && is_follower(text, cut)) --cut;  // not in the middle of a character
  return '"' + printable(text.substr(0, cut)) + "...\"";
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
