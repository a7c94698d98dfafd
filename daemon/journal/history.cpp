#include "daemon/journal/history.hpp"

namespace agreed::journal {
namespace {

// Ids of names are replaced by their texts, so that the chain also holds what the names say.
constexpr std::array<TableShape, kTables> kShapes = {{
    {"files", 6, true, false,
     "t.id, (SELECT text FROM names WHERE id = t.analyzer), t.name, t.sha256, t.size, t.mtime_ns"},
    {"file_outcomes", 3, false, false, "t.file, t.outcome, t.reason"},
    {"arrivals", 8, false, false,
     "t.file, (SELECT text FROM names WHERE id = t.analyzer), t.accepted, t.repeated, t.rejected, t.voided, "
     "t.censored, t.newest_measured_at"},
    {"readings", 14, false, true,
     "(SELECT text FROM names WHERE id = t.analyzer), t.kind, "
     "(SELECT text FROM names WHERE id = t.measurand), t.item, t.measured_at, t.replicate, t.revision, "
     "t.value, t.censored, t.file, t.line, t.by, t.note, t.flags"},
    {"voids", 11, false, false,
     "(SELECT text FROM names WHERE id = t.analyzer), t.kind, "
     "(SELECT text FROM names WHERE id = t.measurand), t.item, t.measured_at, t.replicate, t.revision, "
     "t.file, t.line, t.by, t.note"},
    {"interventions", 9, true, true,
     "t.id, t.analyzer, t.standard, t.measurand, t.kind, t.at, t.by, t.note, t.file"},
    {"rejected_rows", 6, true, false, "t.id, t.file, t.line, t.field, t.text, t.reason"},
    {"findings", 5, true, false, "t.id, t.at, t.kind, t.subject, t.body"},
    {"alert_transitions", 6, true, false, "t.id, t.alert, t.at, t.change, t.state, t.body"},
    {"messages", 8, true, false,
     "t.id, t.webhook_id, t.route, t.type, t.body, t.alert, t.created_at, t.due_at"},
    {"delivery_tries", 8, true, false,
     "t.id, t.message, t.at, t.status, t.error, t.delivered, t.given_up, t.next_due"},
    {"resends", 3, true, false, "t.id, t.message, t.at"},
    {"configurations", 4, true, false, "t.id, t.at, t.sha256, t.text"},
}};

std::string insert_sql(const TableShape& shape) {
  std::string sql = std::string("INSERT INTO ") + shape.name + " VALUES(?";
  for (int i = 1; i < shape.fields + 2; ++i) sql += ",?";
  sql += ")";
  if (shape.may_repeat) sql += " ON CONFLICT DO NOTHING";
  return sql;
}

}  // namespace

const TableShape& shape_of(Table table) {
  return kShapes.at(static_cast<std::size_t>(table));
}

HistoryWriter::HistoryWriter(SQLite::Database& database) {
  for (std::size_t i = 0; i < kTables; ++i) {
    targets_[i].statement = std::make_unique<WriteStatement>(database, insert_sql(kShapes[i]));
    targets_[i].last_id = last_id(database, kShapes[i]);
  }
}

std::int64_t HistoryWriter::last_id(SQLite::Database& database, const TableShape& shape) {
  if (!shape.numbered) return 0;
  return database.execAndGet(std::string("SELECT coalesce(max(id), 0) FROM ") + shape.name).getInt64();
}

void HistoryWriter::begin(std::int64_t sequence, std::string_view previous, Instant at) {
  batch_ = sequence;
  position_ = 0;
  for (Target& target : targets_) target.committed_id = target.last_id;
  text_.begin(sequence, previous, at);
}

void HistoryWriter::forget_batch() noexcept {
  position_ = 0;
  for (Target& target : targets_) {
    target.last_id = target.committed_id;
    target.statement->reset();
  }
}

HistoryWriter& HistoryWriter::start(Table table) {
  table_ = table;
  place_ = 0;
  const auto i = static_cast<std::size_t>(table);
  text_.begin_row(kShapes[i].name);
  if (kShapes[i].numbered) integer(targets_[i].last_id + 1);
  return *this;
}

HistoryWriter& HistoryWriter::name(std::int64_t id, std::string_view text) {
  text_.text(text);
  targets_[static_cast<std::size_t>(table_)].statement->bind_integer(++place_, id);
  return *this;
}

HistoryWriter& HistoryWriter::integer(std::int64_t value) {
  text_.integer(value);
  targets_[static_cast<std::size_t>(table_)].statement->bind_integer(++place_, value);
  return *this;
}

HistoryWriter& HistoryWriter::optional_integer(std::optional<std::int64_t> value) {
  if (value) return integer(*value);
  text_.absent();
  targets_[static_cast<std::size_t>(table_)].statement->bind_null(++place_);
  return *this;
}

HistoryWriter& HistoryWriter::real(double value) {
  text_.real(value);
  targets_[static_cast<std::size_t>(table_)].statement->bind_real(++place_, value);
  return *this;
}

HistoryWriter& HistoryWriter::text(std::string_view value) {
  text_.text(value);
  targets_[static_cast<std::size_t>(table_)].statement->bind_text(++place_, value);
  return *this;
}

HistoryWriter& HistoryWriter::bytes(std::string_view value) {
  text_.text(value);
  targets_[static_cast<std::size_t>(table_)].statement->bind_bytes(++place_, value);
  return *this;
}

std::optional<std::int64_t> HistoryWriter::insert() {
  const auto i = static_cast<std::size_t>(table_);
  Target& target = targets_[i];
  target.statement->bind_integer(++place_, batch_);
  target.statement->bind_integer(++place_, position_ + 1);
  if (target.statement->insert() == 0) {
    text_.drop_row();
    return std::nullopt;
  }
  text_.end_row();
  ++position_;
  return kShapes[i].numbered ? ++target.last_id : 0;
}

}  // namespace agreed::journal
