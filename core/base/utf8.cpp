#include "core/base/utf8.hpp"

namespace agreed {
namespace {

unsigned byte_at(std::string_view text, std::size_t at) {
  return at < text.size() ? static_cast<unsigned char>(text[at]) : 0U;
}

bool follows(std::string_view text, std::size_t at) {
  return (byte_at(text, at) & 0xC0U) == 0x80U;
}

}  // namespace

std::size_t utf8_length(std::string_view text) {
  if (text.empty()) return 0;
  const unsigned lead = byte_at(text, 0), second = byte_at(text, 1);
  if (lead < 0x80) return 1;
  if (lead < 0xC2 || lead > 0xF4 || !follows(text, 1)) return 0;
  if (lead < 0xE0) return 2;
  if (!follows(text, 2)) return 0;
  if (lead < 0xF0) {
    const bool overlong = lead == 0xE0 && second < 0xA0, surrogate = lead == 0xED && second > 0x9F;
    return overlong || surrogate ? 0 : 3;
  }
  const bool overlong = lead == 0xF0 && second < 0x90, beyond = lead == 0xF4 && second > 0x8F;
  return follows(text, 3) && !overlong && !beyond ? 4 : 0;
}

}  // namespace agreed
