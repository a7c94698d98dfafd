#include "daemon/journal/verify.hpp"

#include "daemon/journal/chain.hpp"
#include "daemon/journal/history.hpp"
#include "daemon/journal/journal_impl.hpp"
#include "daemon/journal/reader_impl.hpp"
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
  Verifier(SQLite::Database& database, std::span<const ChainHead> kept) : database_(database), kept_(kept) {}

  JournalProof run() {
    try {
      check_structure();
      check_outbox();
      check_chain();
      check_kept_beyond_the_end();
    } catch (const SQLite::Exception& error) {
      if (!journal::is_damage(error)) throw;
      fault(std::string("The database cannot be read to its end: ") + error.what());
    }
    return std::move(proof_);
  }

 private:
  void fault(const std::string& words) {
    if (proof_.faults.size() < kMostFaults) proof_.faults.push_back(words);
  }

  void check_chain() {
    for (std::size_t i = 0; i < journal::kTables; ++i)
      tables_.push_back(
          std::make_unique<RowStream>(database_, journal::shape_of(static_cast<journal::Table>(i))));
    start_chain();
    SQLite::Statement batches(
        database_, "SELECT sequence, previous, sha256, committed_at FROM batches ORDER BY sequence");
    while (batches.executeStep()) check_batch(batches);
    if (first_waiting() != nullptr) fault("There are rows of batches after the newest one");
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

  // The outbox has no hash of its own: it must say what the messages and the tries say.
  void check_outbox() {
    SQLite::Statement wrong(database_, R"sql(
      SELECT m.id, o.message IS NULL OR o.route <> m.route FROM messages m LEFT JOIN outbox o ON o.message = m.id
      WHERE o.message IS NULL OR o.route <> m.route OR o.state <> coalesce((
        SELECT e.state FROM (
          SELECT batch, position, CASE WHEN delivered THEN 'delivered' WHEN given_up THEN 'undeliverable'
                                       ELSE 'waiting' END AS state FROM delivery_tries WHERE message = m.id
          UNION ALL SELECT batch, position, 'waiting' FROM resends WHERE message = m.id) e
        ORDER BY e.batch DESC, e.position DESC LIMIT 1), 'waiting'))sql");
    while (wrong.executeStep()) {
      const std::string which = "Message " + std::to_string(wrong.getColumn(0).getInt64());
      fault(which + (wrong.getColumn(1).getInt() != 0
                         ? " is missing in the outbox or goes to another route there"
                         : " has another state in the outbox than its tries give"));
    }
  }

  void start_chain() {
    SQLite::Statement meta(database_, "SELECT source, created_at FROM meta");
    meta.executeStep();
    proof_.head.sha256 = journal::chain_start(meta.getColumn(0).getString(), instant(meta.getColumn(1)));
    look_for_kept();
  }

  /// Compares the batch the chain has come to with what was kept elsewhere.
  void look_for_kept() {
    for (const ChainHead& kept : kept_) {
      if (kept.sequence != proof_.head.sequence || kept == proof_.head) continue;
      proof_.not_found.push_back(kept);
      fault("Batch " + std::to_string(kept.sequence) +
            " has another hash than the one kept elsewhere: history up to it was written anew");
    }
  }

  void check_kept_beyond_the_end() {
    for (const ChainHead& kept : kept_) {
      if (kept.sequence <= proof_.head.sequence) continue;
      proof_.not_found.push_back(kept);
      fault("The chain ends with batch " + std::to_string(proof_.head.sequence) +
            ", and the head kept elsewhere is batch " + std::to_string(kept.sequence) +
            ": what came after was cut off");
    }
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
    look_for_kept();
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
  std::span<const ChainHead> kept_;
  std::vector<std::unique_ptr<RowStream>> tables_;
  BatchText text_;
  JournalProof proof_;
};

template <class Prove>
JournalProof damage_is_a_fault(const std::filesystem::path& database, const Prove& prove) {
  try {
    return journal::translating(database, prove);
  } catch (const JournalError& error) {
    if (!error.damaged) throw;
    return {.batches = 0, .rows = 0, .head = {}, .not_found = {}, .faults = {error.what()}};
  }
}

}  // namespace

JournalProof verify_database(const std::filesystem::path& database, std::span<const ChainHead> kept) {
  return damage_is_a_fault(database, [&] {
    const auto connection = journal::open_reader(database);
    journal::check_usable(*connection, database);
    connection->exec("BEGIN");
    return Verifier(*connection, kept).run();
  });
}

JournalProof JournalReader::prove() {
  return damage_is_a_fault(impl_->file, [&] { return Verifier(*impl_->database, {}).run(); });
}

std::filesystem::path database_of(const std::filesystem::path& folder) {
  return journal::database_file(folder);
}

JournalProof verify_journal(const std::filesystem::path& folder, std::span<const ChainHead> kept) {
  return verify_database(journal::database_file(folder), kept);
}

}  // namespace agreed
