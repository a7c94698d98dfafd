#pragma once
// Writing history rows. Each value goes into the table and into the batch's canonical text by one call, so
// the two cannot differ. Private to daemon/journal.
#include <array>
#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <string_view>

#include "daemon/journal/chain.hpp"
#include "daemon/journal/connection.hpp"

namespace agreed::journal {

enum class Table : std::uint8_t {
  files,
  file_outcomes,
  arrivals,
  readings,
  voids,
  interventions,
  rejected_rows,
  findings,
  alert_transitions,
  messages,
  delivery_tries,
  resends,
  configurations
};
inline constexpr std::size_t kTables = 13;

struct TableShape {
  const char* name;
  int fields;             ///< before (batch, position)
  bool numbered;          ///< the first field is an id that we count
  bool may_repeat;        ///< a row whose key is known is left out silently
  const char* canonical;  ///< SQL of the fields as the canonical text has them
};
[[nodiscard]] const TableShape& shape_of(Table table);

class HistoryWriter {
 public:
  explicit HistoryWriter(SQLite::Database& database);

  void begin(std::int64_t sequence, std::string_view previous, Instant at);
  /// After a rolled-back batch: the ids it took are free again.
  void forget_batch() noexcept;
  [[nodiscard]] bool empty() const { return position_ == 0; }
  /// The largest id of `table` outside the open batch.
  [[nodiscard]] std::int64_t committed_id(Table table) const {
    return targets_[static_cast<std::size_t>(table)].committed_id;
  }
  [[nodiscard]] std::string finish() { return text_.finish(); }

  // One row: start, its fields in order, then insert. Texts must live until insert() returns.
  HistoryWriter& start(Table table);  ///< also writes the id of a numbered table
  HistoryWriter& name(std::int64_t id, std::string_view text);
  HistoryWriter& integer(std::int64_t value);
  HistoryWriter& time(Instant at) { return integer(at.time_since_epoch().count()); }
  HistoryWriter& optional_integer(std::optional<std::int64_t> value);
  HistoryWriter& real(double value);
  HistoryWriter& text(std::string_view value);
  HistoryWriter& bytes(std::string_view value);
  /// The row's id (0 for tables that are not numbered), or nothing if its key was known.
  std::optional<std::int64_t> insert();

 private:
  struct Target {
    std::unique_ptr<WriteStatement> statement;
    std::int64_t last_id = 0;
    std::int64_t committed_id = 0;
  };
  static std::int64_t last_id(SQLite::Database& database, const TableShape& shape);

  std::array<Target, kTables> targets_;
  BatchText text_;
  std::int64_t batch_ = 0;
  std::int64_t position_ = 0;
  Table table_{};
  int place_ = 0;
};

}  // namespace agreed::journal
