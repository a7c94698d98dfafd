#include "daemon/journal/connection.hpp"

namespace agreed::journal {
namespace {

constexpr int kBusyMs = 1000;

bool may_pass(int code) {
  switch (code & 0xff) {
    case SQLITE_FULL:
    case SQLITE_BUSY:
    case SQLITE_LOCKED:
    case SQLITE_IOERR:
    case SQLITE_READONLY:
    case SQLITE_CANTOPEN:
    case SQLITE_PROTOCOL:
    case SQLITE_NOMEM:
      return true;
    default:
      return false;
  }
}

std::string advice(int code) {
  switch (code & 0xff) {
    case SQLITE_FULL:
      return "The disk is full; make room. Nothing is lost, it is tried again.";
    case SQLITE_BUSY:
    case SQLITE_LOCKED:
      return "Another process has locked it; end whatever writes to it. Nothing is lost, it is tried again.";
    case SQLITE_READONLY:
    case SQLITE_CANTOPEN:
      return "The service must be able to write this file and its folder; check owner, permissions and that "
             "the disk is not mounted read-only.";
    case SQLITE_IOERR:
      return "The disk did not do what was asked. Nothing is lost, it is tried again.";
    default:
      return "The batch was taken back.";
  }
}

// A null pointer would be bound as NULL; an empty string_view often has one.
const char* bytes_of(std::string_view value) {
  return value.data() == nullptr ? "" : value.data();
}

}  // namespace

std::filesystem::path database_file(const std::filesystem::path& folder) {
  return folder / "journal.sqlite";
}

std::unique_ptr<SQLite::Database> open_writer(const std::filesystem::path& file) {
  auto database = std::make_unique<SQLite::Database>(file.string(),
                                                     SQLite::OPEN_READWRITE | SQLite::OPEN_NOMUTEX, kBusyMs);
  // Values are never secret here, so pages need no wiping when they split. The log is written back between
  // batches (Journal::write_back), not within a commit that somebody waits for.
  database->exec(
      "PRAGMA foreign_keys = ON; PRAGMA synchronous = FULL; PRAGMA mmap_size = 0; PRAGMA cache_size = -16384;"
      "PRAGMA secure_delete = OFF; PRAGMA wal_autocheckpoint = 0; PRAGMA journal_size_limit = 67108864");
  const std::string mode = database->execAndGet("PRAGMA journal_mode = WAL").getString();
  if (mode != "wal")
    throw JournalError("The journal " + file.string() +
                           " cannot be kept in write-ahead mode. The state folder must lie on a local disk.",
                       false);
  return database;
}

std::unique_ptr<SQLite::Database> open_reader(const std::filesystem::path& file) {
  auto database = std::make_unique<SQLite::Database>(file.string(),
                                                     SQLite::OPEN_READONLY | SQLite::OPEN_NOMUTEX, kBusyMs);
  database->exec("PRAGMA mmap_size = 0");
  return database;
}

JournalError damaged(const std::filesystem::path& file, std::string_view how) {
  return JournalError("The journal " + file.string() + " is damaged: " + std::string(how) +
                          ". Stop the service, keep a copy of the file, and put back a backup with `agreed "
                          "restore CONFIG FILE`.",
                      false, true);
}

bool is_damage(const SQLite::Exception& error) {
  const int code = error.getErrorCode() & 0xff;
  return code == SQLITE_NOTADB || code == SQLITE_CORRUPT;
}

bool is_disk_trouble(const SQLite::Exception& error) {
  const int code = error.getErrorCode() & 0xff;
  return code == SQLITE_IOERR || code == SQLITE_CORRUPT || code == SQLITE_NOTADB || code == SQLITE_CANTOPEN;
}

JournalError to_journal_error(const SQLite::Exception& error, const std::filesystem::path& file) {
  if (is_damage(error)) return damaged(file, error.what());
  const int code = error.getErrorCode() & 0xff;
  return JournalError("The journal " + file.string() + " could not be used: " + error.what() + " (SQLite " +
                          std::to_string(error.getExtendedErrorCode()) + "). " + advice(code),
                      may_pass(code));
}

WriteStatement::WriteStatement(SQLite::Database& database, const std::string& sql)
    : database_(database.getHandle()) {
  check(sqlite3_prepare_v3(database_, sql.c_str(), static_cast<int>(sql.size()), SQLITE_PREPARE_PERSISTENT,
                           &statement_, nullptr));
}

void WriteStatement::bind_text(int place, std::string_view value) {
  check(sqlite3_bind_text(statement_, place, bytes_of(value), static_cast<int>(value.size()), SQLITE_STATIC));
}

void WriteStatement::bind_bytes(int place, std::string_view value) {
  check(sqlite3_bind_blob(statement_, place, bytes_of(value), static_cast<int>(value.size()), SQLITE_STATIC));
}

int WriteStatement::insert() {
  const int code = sqlite3_step(statement_);
  if (code != SQLITE_DONE) {
    const SQLite::Exception error(database_, code);
    reset();
    throw error;
  }
  const int rows = sqlite3_changes(database_);
  reset();
  return rows;
}

}  // namespace agreed::journal
