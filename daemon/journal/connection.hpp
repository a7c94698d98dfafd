#pragma once
// Connections to the journal's database, and its errors in words. Private to daemon/journal.
#include <cstdint>
#include <filesystem>
#include <memory>
#include <string>
#include <string_view>

#include <SQLiteCpp/SQLiteCpp.h>
#include <sqlite3.h>

#include "daemon/journal/journal.hpp"

namespace agreed::journal {

/// `folder`/journal.sqlite.
[[nodiscard]] std::filesystem::path database_file(const std::filesystem::path& folder);

/// The one read-write connection: WAL, every commit synced, foreign keys on, no memory mapping.
[[nodiscard]] std::unique_ptr<SQLite::Database> open_writer(const std::filesystem::path& file);
[[nodiscard]] std::unique_ptr<SQLite::Database> open_reader(const std::filesystem::path& file);

/// Whether the file itself is at fault, and not the disk or another process.
[[nodiscard]] bool is_damage(const SQLite::Exception& error);

/// Whether the disk failed, so that what the connection holds in memory is not trusted any more.
[[nodiscard]] bool is_disk_trouble(const SQLite::Exception& error);

/// What went wrong, where and what to do, for people; `retry` is set for causes that may pass.
[[nodiscard]] JournalError to_journal_error(const SQLite::Exception& error,
                                            const std::filesystem::path& file);

/// The text JournalError gives for a file that cannot be trusted.
[[nodiscard]] JournalError damaged(const std::filesystem::path& file, std::string_view how);

/// Runs `work`; what SQLite or the file system throws comes out as JournalError.
template <class Work>
auto translating(const std::filesystem::path& file, const Work& work) {
  try {
    return work();
  } catch (const SQLite::Exception& error) {
    throw to_journal_error(error, file);
  } catch (const std::filesystem::filesystem_error& error) {
    throw JournalError(std::string("The journal's files could not be handled: ") + error.what(), true);
  }
}

/// A prepared statement for the write path. SQLiteCpp's copies every text bound to it and cannot take a
/// string_view; here the bytes are only borrowed, until the next reset.
class WriteStatement {
 public:
  WriteStatement(SQLite::Database& database, const std::string& sql);
  ~WriteStatement() { sqlite3_finalize(statement_); }
  WriteStatement(const WriteStatement&) = delete;
  WriteStatement& operator=(const WriteStatement&) = delete;

  void bind_integer(int place, std::int64_t value) { check(sqlite3_bind_int64(statement_, place, value)); }
  void bind_real(int place, double value) { check(sqlite3_bind_double(statement_, place, value)); }
  void bind_null(int place) { check(sqlite3_bind_null(statement_, place)); }
  void bind_text(int place, std::string_view value);
  void bind_bytes(int place, std::string_view value);
  /// Number of rows inserted.
  int insert();
  void reset() noexcept { sqlite3_reset(statement_); }

 private:
  void check(int code) const {
    if (code != SQLITE_OK) throw SQLite::Exception(database_, code);
  }

  sqlite3* database_;
  sqlite3_stmt* statement_ = nullptr;
};

}  // namespace agreed::journal
