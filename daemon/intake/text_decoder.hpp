#pragma once
// Any character set to UTF-8, as a stream.
#include <string>
#include <string_view>

namespace agreed {

/// Uses iconv. What cannot be read in the character set becomes a byte 0xFF, which is no UTF-8: a row that
/// needs that text is then a bad one, and no other.
class TextDecoder {
 public:
  /// `encoding` as iconv names it. Throws std::runtime_error if the system does not know it.
  explicit TextDecoder(const std::string& encoding);
  ~TextDecoder();
  TextDecoder(const TextDecoder&) = delete;
  TextDecoder& operator=(const TextDecoder&) = delete;

  /// The text of the next bytes, cut anywhere; valid until the next call. A byte order mark stays in it.
  [[nodiscard]] std::string_view decode(std::string_view bytes);
  /// What a character that was cut off at the end becomes.
  [[nodiscard]] std::string_view finish();

 private:
  void convert(std::string_view bytes);

  void* state_;
  std::size_t unit_;     ///< bytes to pass over after what cannot be read
  std::string waiting_;  ///< the beginning of a character
  std::string text_;
};

}  // namespace agreed
