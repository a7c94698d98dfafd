#include "daemon/printable.hpp"

#include <array>
#include <cstdio>

#include "core/base/utf8.hpp"

namespace agreed {
namespace {

/// Length of the clean character `text` begins with; 0 if it begins with a control character or no character.
std::size_t clean_length(std::string_view text) {
  const std::size_t length = utf8_length(text);
  const auto lead = static_cast<unsigned char>(text.front());
  if (length == 1) return lead >= 0x20 && lead != 0x7F ? 1 : 0;
  const bool is_c1 = length == 2 && lead == 0xC2 && static_cast<unsigned char>(text[1]) < 0xA0;
  return is_c1 ? 0 : length;
}

}  // namespace

bool is_clean_text(std::string_view text) {
  while (!text.empty()) {
    const std::size_t length = clean_length(text);
    if (length == 0) return false;
    text.remove_prefix(length);
  }
  return true;
}

std::string printable(std::string_view bytes) {
  std::string text;
  text.reserve(bytes.size());
  while (!bytes.empty()) {
    const std::size_t length = bytes.front() == '\\' ? 0 : clean_length(bytes);
    if (length == 0) {
      std::array<char, 5> code{};
      std::snprintf(code.data(), code.size(), "\\x%02X",
                    static_cast<unsigned>(static_cast<unsigned char>(bytes.front())));
      text += code.data();
      bytes.remove_prefix(1);
      continue;
    }
    text += bytes.substr(0, length);
    bytes.remove_prefix(length);
  }
  return text;
}

}  // namespace agreed
