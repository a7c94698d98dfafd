#pragma once
// Blocks of bytes to lines, in bounded memory.
#include <cstdint>
#include <string>
#include <string_view>

#include "daemon/intake/plain_columns.hpp"

namespace agreed {

/// Gives each line to `take(line, number, too_long)`: without its LF, with a CR before it if there was one. A
/// line beyond the limit comes once, cut, with too_long. `take` returns false to stop.
class LineSplitter {
 public:
  /// False if `take` stopped it.
  template <class Take>
  bool feed(std::string_view block, Take&& take) {
    while (!block.empty()) {
      const std::size_t end = block.find('\n');
      if (end == std::string_view::npos) {
        keep(block);
        return true;
      }
      const std::string_view piece = block.substr(0, end);
      block.remove_prefix(end + 1);
      if (!emit(piece, take)) return false;
    }
    return true;
  }

  /// What stands after the last line end, as a line.
  template <class Take>
  void finish(Take&& take) {
    if (has_rest()) emit({}, take);
  }

  [[nodiscard]] bool has_rest() const { return !rest_.empty() || too_long_; }
  [[nodiscard]] std::string_view rest() const { return rest_; }
  [[nodiscard]] std::uint32_t next_line() const { return number_ + 1; }

 private:
  template <class Take>
  bool emit(std::string_view piece, Take& take) {
    ++number_;
    if (!has_rest() && piece.size() <= kMostLineBytes) return take(piece, number_, false);
    keep(piece);
    const bool go_on = take(std::string_view(rest_), number_, too_long_);
    rest_.clear();
    too_long_ = false;
    return go_on;
  }

  void keep(std::string_view piece) {
    const std::size_t room = kMostLineBytes - rest_.size();
    too_long_ = too_long_ || piece.size() > room;
    rest_.append(piece.substr(0, room));
  }

  std::string rest_;
  bool too_long_ = false;
  std::uint32_t number_ = 0;
};

}  // namespace agreed
