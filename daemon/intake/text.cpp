#include "daemon/intake/text.hpp"

#include "core/base/ascii.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

constexpr std::size_t kShown = 60;

bool is_follower(std::string_view text, std::size_t at) {
  return at < text.size() && (static_cast<unsigned char>(text[at]) & 0xC0U) == 0x80U;
}

}  // namespace

std::string in_quotes(std::string_view text) {
  if (text.size() <= kShown) return '"' + printable(text) + '"';
  std::size_t cut = kShown;
  while (cut > kShown - 3 && is_follower(text, cut)) --cut;  // not in the middle of a character
  return '"' + printable(text.substr(0, cut)) + "...\"";
}

bool ends_with_word(std::string_view text, std::string_view end) {
  return text.size() >= end.size() && ascii::same_letters(text.substr(text.size() - end.size()), end);
}

}  // namespace agreed
