#include "config/utf8.hpp"

#include "core/base/utf8.hpp"

namespace agreed::settings_file {
std::optional<std::size_t> first_bad_utf8(std::string_view text) {
  for (std::size_t at = 0; at < text.size();) {
    const std::size_t length = utf8_length(text.substr(at));
    if (length == 0) return at;
    at += length;
  }
  return std::nullopt;
}

std::optional<std::size_t> first_control(std::string_view text) {
  for (std::size_t at = 0; at < text.size(); ++at) {
    const auto byte = static_cast<unsigned char>(text[at]);
    const bool control = byte < 0x20 || byte == 0x7F;
    if (control && byte != '\t' && byte != '\n' && byte != '\r') return at;
  }
  return std::nullopt;
}

}  // namespace agreed::settings_file
