#pragma once
// Analyzers and measurands as small numbers, so that a reading's key is short. Private to daemon/journal.
#include <cstdint>
#include <deque>
#include <optional>
#include <string>
#include <string_view>
#include <unordered_map>

#include "daemon/journal/connection.hpp"

namespace agreed::journal {

class Names {
 public:
  explicit Names(SQLite::Database& database);

  /// Makes the name known if it is not.
  [[nodiscard]] std::int64_t id_of(std::string_view text);
  [[nodiscard]] std::optional<std::int64_t> find(std::string_view text) const;
  /// `id` must have come from id_of or find.
  [[nodiscard]] std::string_view text_of(std::int64_t id) const {
    return texts_[static_cast<std::size_t>(id - 1)];
  }

  void begin_batch() { committed_ = texts_.size(); }
  void forget_batch() noexcept;

 private:
  WriteStatement insert_;
  std::deque<std::string> texts_;  ///< a deque, because ids_ points into it
  std::unordered_map<std::string_view, std::int64_t> ids_;
  std::size_t committed_ = 0;
};

}  // namespace agreed::journal
