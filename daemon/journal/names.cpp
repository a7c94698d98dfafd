#include "daemon/journal/names.hpp"

namespace agreed::journal {

Names::Names(SQLite::Database& database) : insert_(database, "INSERT INTO names VALUES(?, ?)") {
  SQLite::Statement all(database, "SELECT id, text FROM names ORDER BY id");
  while (all.executeStep()) {
    texts_.push_back(all.getColumn(1).getString());
    ids_.emplace(texts_.back(), all.getColumn(0).getInt64());
    if (all.getColumn(0).getInt64() != static_cast<std::int64_t>(texts_.size()))
      throw JournalError("The journal is damaged: a row of its table of names is gone. Put back a backup.",
                         false);
  }
  committed_ = texts_.size();
}

std::optional<std::int64_t> Names::find(std::string_view text) const {
  const auto found = ids_.find(text);
  if (found == ids_.end()) return std::nullopt;
  return found->second;
}

std::int64_t Names::id_of(std::string_view text) {
  if (const auto known = find(text)) return *known;
  const auto id = static_cast<std::int64_t>(texts_.size()) + 1;
  insert_.bind_integer(1, id);
  insert_.bind_text(2, text);
  insert_.insert();
  texts_.emplace_back(text);
  ids_.emplace(texts_.back(), id);
  return id;
}

void Names::forget_batch() noexcept {
  insert_.reset();
  for (; texts_.size() > committed_; texts_.pop_back()) ids_.erase(texts_.back());
}

}  // namespace agreed::journal
