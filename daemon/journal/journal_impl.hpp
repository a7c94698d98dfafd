#pragma once
// The parts of a Journal and the rules of a batch. Private to daemon/journal.
#include <map>
#include <memory>
#include <string>
#include <string_view>
#include <utility>

#include "daemon/journal/connection.hpp"
#include "daemon/journal/history.hpp"
#include "daemon/journal/journal.hpp"
#include "daemon/journal/names.hpp"
#include "daemon/journal/tallies.hpp"

namespace agreed::journal {

/// A prepared statement on loan: reset when it goes, so that no half-read SELECT keeps a snapshot open.
class Query {
 public:
  explicit Query(SQLite::Statement& statement) : statement_(statement) {}
  ~Query() { statement_.tryReset(); }
  Query(const Query&) = delete;
  Query& operator=(const Query&) = delete;
  SQLite::Statement* operator->() { return &statement_; }
  SQLite::Statement& operator*() { return statement_; }

 private:
  SQLite::Statement& statement_;
};

struct Store {
  explicit Store(const std::filesystem::path& folder);

  std::filesystem::path file;
  std::unique_ptr<SQLite::Database> database;
  Names names;
  HistoryWriter history;
  Tallies tallies, committed;  ///< with and without the open batch
  std::string source;
  ChainHead head;
  bool in_batch = false;
  bool doubtful = false;  ///< the disk did not do what was asked: the connection is not trusted
  Instant now{};
  int log_pages = 0;     ///< in the write-ahead log after the last commit
  int written_back = 0;  ///< of them, when it was last written back

  /// Whether the chain of this store goes on from `head` of the journal `source`.
  [[nodiscard]] bool continues(const std::string& source_before, const ChainHead& head_before);

  void begin(Instant at);
  void commit();
  void rollback() noexcept;
  void write_back(bool something_waits) noexcept;

  /// Runs one step of a batch; if it throws, the batch is rolled back, and what SQLite threw comes out as
  /// JournalError.
  template <class Step>
  auto in_open_batch(const Step& step) {
    try {
      if (!in_batch)
        throw JournalError("The journal was written to outside a batch (a fault of ours)", false);
      return step();
    } catch (const SQLite::Exception& error) {
      const JournalError told = to_journal_error(error, file);
      doubtful = doubtful || is_disk_trouble(error);
      rollback();
      throw told;
    } catch (...) {
      rollback();
      throw;
    }
  }

  /// Prepared once per text; `sql` must be a literal. Not to be borrowed twice at a time.
  [[nodiscard]] Query query(const char* sql);

  /// The sequence the open batch will have.
  [[nodiscard]] std::int64_t open_batch() const { return head.sequence + 1; }
  [[nodiscard]] std::int64_t analyzer_of_file(std::int64_t id);

 private:
  void must_be_in_place();
  void write_arrivals();
  void write_batch(const ChainHead& next);
  void load_identity();

  std::map<const char*, std::unique_ptr<SQLite::Statement>> queries_;
  std::pair<std::int64_t, std::int64_t> last_file_{0, 0};  ///< file and its analyzer
};

[[nodiscard]] inline std::int64_t milliseconds(Instant at) {
  return at.time_since_epoch().count();
}
[[nodiscard]] inline Instant instant(const SQLite::Column& column) {
  return Instant{Duration{column.getInt64()}};
}

}  // namespace agreed::journal

namespace agreed {

struct Journal::Impl : journal::Store {
  using Store::Store;
};

}  // namespace agreed
