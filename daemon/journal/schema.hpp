#pragma once
// The database's schema, how a new journal comes to be and how an older one is brought forward. Private to
// daemon/journal.
#include <filesystem>
#include <span>

#include <SQLiteCpp/SQLiteCpp.h>

#include "core/base/instant.hpp"

namespace agreed::journal {

/// The schema this program reads and writes (PRAGMA user_version).
inline constexpr int kSchema = 1;

/// SQL that brings a journal of schema `from` to `from` + 1.
struct Migration {
  int from;
  const char* sql;
};

/// Creates the journal at `file` if nothing is there. It is made under another name and then renamed, so an
/// empty or half-made journal.sqlite is never ours. Throws JournalError for a file that was emptied, or one
/// that is gone while its write-ahead log is still there.
void create_if_missing(const std::filesystem::path& file, Instant now);

/// Where a restored journal waits while what it replaces is put aside. A service does not start beside it.
[[nodiscard]] std::filesystem::path restoring_file(const std::filesystem::path& file);

/// A consistent, lasting copy at `copy`, which must not exist; nobody may read it who may not read `like`.
void copy_database(SQLite::Database& database, const std::filesystem::path& copy,
                   const std::filesystem::path& like);

/// Throws JournalError unless the file is a journal of schema `schema` or older, with its newest batch
/// readable. Cheap whatever the size.
void check_usable(SQLite::Database& database, const std::filesystem::path& file, int schema = kSchema);

/// Brings an older schema forward, one transaction a step, after copying the database to
/// journal.before-schema-M.sqlite beside it, M the first new schema.
void migrate(SQLite::Database& database, const std::filesystem::path& file,
             std::span<const Migration> migrations, int schema = kSchema);

/// The migrations this program knows.
[[nodiscard]] std::span<const Migration> migrations();

}  // namespace agreed::journal
