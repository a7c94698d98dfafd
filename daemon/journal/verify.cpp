#include "daemon/journal/verify.hpp"

#include "daemon/journal/chain.hpp"
#include "daemon/journal/history.hpp"
#include "daemon/journal/journal_impl.hpp"
#include "daemon/journal/schema.hpp"

namespace agreed {
namespace {

using journal::BatchText;
using journal::instant;
using journal::TableShape;

constexpr std::size_t kMostFaults = 20;

/// The rows of one table in the order they were written.
class RowStream {
 public:
  RowStream(SQLite::Database& database, const TableShape& shape)
      : shape_(shape),
        rows_(database, std::string("SELECT t.batch, t.position, ") + shape.canonical + " FROM " +
                            shape.name + " t ORDER BY t.batch, t.position") {
    next();
  }

  [[nodiscard]] bool at_end() const { return at_end_; }
  [[nodiscard]] std::int64_t batch() { return rows_.getColumn(0).getInt64(); }
  [[nodiscard]] std::int64_t position() { return rows_.getColumn(1).getInt64(); }
  void next() { at_end_ = !rows_.executeStep(); }

  void write(BatchText& text) {
    text.begin_row(shape_.name);
    for (int i = 0; i < shape_.fields; ++i) write_field(text, rows_.getColumn(i + 2));
    text.end_row();
  }

 private:
  static void write_field(BatchText& text, const SQLite::Column& field) {
    if (field.isNull())
      text.absent();
    else if (field.isInteger())
      text.integer(field.getInt64());
    else if (field.isFloat())
      text.real(field.getDouble());
    else
      text.text(field.getString());
  }

  const TableShape& shape_;
  SQLite::Statement rows_;
  bool at_end_ = false;
};

class Verifier {
 public:
  explicit Verifier(SQLite::Database& database) : database_(database) {
    for (std::size_t i = 0; i < journal::kTables; ++i)
      tables_.push_back(
          std::make_unique<RowStream>(database, journal::shape_of(static_cast<journal::Table>(i))));
  }

  JournalProof run() {
    check_structure();
    start_chain();
    SQLite::Statement batches(
        database_, "SELECT sequence, previous, sha256, committed_at FROM batches ORDER BY sequence");
    while (batches.executeStep()) check_batch(batches);
    if (first_waiting() != nullptr) fault("There are rows of batches after the newest one");
    return std::move(proof_);
  }

 private:
  void fault(const std::string& words) {
    if (proof_.faults.size() < kMostFaults) proof_.faults.push_back(words);
  }

  void check_structure() {
    SQLite::Statement integrity(database_, "PRAGMA integrity_check(20)");
    while (integrity.executeStep()) {
      const std::string words = integrity.getColumn(0).getString();
      if (words != "ok") fault("The database's structure: " + words);
    }
    SQLite::Statement foreign(database_, "PRAGMA foreign_key_check");
    while (foreign.executeStep())
      fault("A row of " + foreign.getColumn(0).getString() + " names a row of " +
            foreign.getColumn(2).getString() + " that is not there");
  }

  void start_chain() {
    SQLite::Statement meta(database_, "SELECT source, created_at FROM meta");
    meta.executeStep();
    proof_.head.sha256 = journal::chain_start(meta.getColumn(0).getString(), instant(meta.getColumn(1)));
  }

  /// The stream whose next row was written first; null when all are read.
  RowStream* first_waiting() {
    RowStream* first = nullptr;
    for (const auto& table : tables_) {
      if (table->at_end()) continue;
      if (first == nullptr ||
          std::pair(table->batch(), table->position()) < std::pair(first->batch(), first->position()))
        first = table.get();
    }
    return first;
  }

  void check_batch(SQLite::Statement& batch) {
    const std::int64_t sequence = batch.getColumn(0).getInt64();
    const std::string previous = batch.getColumn(1).getString(), stored = batch.getColumn(2).getString();
    const std::string which = "Batch " + std::to_string(sequence);
    if (sequence != proof_.head.sequence + 1)
      fault(which + " follows batch " + std::to_string(proof_.head.sequence) +
            ": what was between is missing");
    if (previous != proof_.head.sha256) fault(which + " does not name the hash of the batch before it");
    text_.begin(sequence, previous, instant(batch.getColumn(3)));
    write_rows(sequence, which);
    if (text_.finish() != stored)
      fault(which + ": its rows do not give its hash; a row was changed, added or removed");
    ++proof_.batches;
    proof_.head = {sequence, stored};
  }

  void write_rows(std::int64_t sequence, const std::string& which) {
    std::int64_t expected = 1;
    for (RowStream* row = first_waiting(); row != nullptr && row->batch() <= sequence;
         row = first_waiting(), ++expected) {
      if (row->batch() < sequence)
        fault("A row belongs to batch " + std::to_string(row->batch()) + ", which is missing");
      else if (row->position() != expected)
        fault(which + ": row " + std::to_string(expected) + " is missing");
      expected = row->position();
      row->write(text_);
      row->next();
      ++proof_.rows;
    }
  }

  SQLite::Database& database_;
  std::vector<std::unique_ptr<RowStream>> tables_;
  BatchText text_;
  JournalProof proof_;
};

}  // namespace

JournalProof verify_journal(const std::filesystem::path& folder) {
  const auto file = journal::database_file(folder);
  return journal::translating(file, [&file] {
    const auto database = journal::open_reader(file);
    journal::check_usable(*database, file);
    database->exec("BEGIN");
    return Verifier(*database).run();
  });
}

}  // namespace agreed
