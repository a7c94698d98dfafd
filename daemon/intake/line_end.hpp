#pragma once
// Where lines end in the bytes of a file, in character sets of one byte and of two.
#include <cstddef>
#include <optional>
#include <string_view>

namespace agreed {

class LineEnd {
 public:
  /// `encoding` as in the configuration; `begin`: the file's first two bytes, whose mark tells which way
  /// round "utf-16" is (little-endian without one).
  LineEnd(std::string_view encoding, std::string_view begin) {
    if (!encoding.starts_with("utf-16")) return;
    const bool big = encoding == "utf-16be" || (encoding == "utf-16" && begin.starts_with("\xFE\xFF"));
    bytes_ = big ? std::string_view("\0\n", 2) : std::string_view("\n\0", 2);
  }

  /// Bytes of a character of the line end.
  [[nodiscard]] std::size_t unit() const { return bytes_.size(); }

  // Positions behind a line end in `bytes`, which begin with a whole character. Half a line end is none.
  [[nodiscard]] std::optional<std::size_t> behind_first(std::string_view bytes) const {
    std::size_t at = bytes.find(bytes_);
    while (at != std::string_view::npos && at % unit() != 0) at = bytes.find(bytes_, at + 1);
    return behind(at);
  }
  [[nodiscard]] std::optional<std::size_t> behind_last(std::string_view bytes) const {
    std::size_t at = bytes.rfind(bytes_);
    while (at != std::string_view::npos && at % unit() != 0) at = bytes.rfind(bytes_, at - 1);  // at is odd
    return behind(at);
  }

 private:
  [[nodiscard]] std::optional<std::size_t> behind(std::size_t at) const {
    return at == std::string_view::npos ? std::nullopt : std::optional(at + unit());
  }

  std::string_view bytes_ = "\n";
};

}  // namespace agreed
