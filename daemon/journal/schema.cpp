#include "daemon/journal/schema.hpp"

#include <algorithm>
#include <array>

#include <openssl/rand.h>

#include "daemon/hex.hpp"
#include "daemon/journal/connection.hpp"
#include "daemon/journal/durable.hpp"
#include "daemon/journal/schema_1.hpp"

namespace agreed::journal {
namespace {

namespace fs = std::filesystem;

// "agrd": tells our files from other SQLite databases.
constexpr int kApplicationId = 0x61677264;

/// A random (version 4) UUID as a URN, RFC 4122.
std::string new_source() {
  std::array<unsigned char, 16> b{};
  if (RAND_bytes(b.data(), static_cast<int>(b.size())) != 1)
    throw JournalError("No random numbers for the journal's identity", true);
  b[6] = static_cast<unsigned char>((b[6] & 0x0fU) | 0x40U);
  b[8] = static_cast<unsigned char>((b[8] & 0x3fU) | 0x80U);
  std::string text = to_hex(b);
  for (const std::size_t hyphen : {8, 13, 18, 23}) text.insert(hyphen, 1, '-');
  return "urn:uuid:" + text;
}

void write_new(const fs::path& file, Instant now) {
  SQLite::Database database(file.string(), SQLite::OPEN_READWRITE | SQLite::OPEN_CREATE);
  database.exec("BEGIN IMMEDIATE");
  database.exec(kSchema1);
  SQLite::Statement meta(database, "INSERT INTO meta VALUES(1, ?, ?)");
  meta.bind(1, new_source());
  meta.bind(2, static_cast<std::int64_t>(now.time_since_epoch().count()));
  meta.exec();
  database.exec("PRAGMA application_id = " + std::to_string(kApplicationId));
  database.exec("PRAGMA user_version = 1");
  database.exec("COMMIT");
}

int pragma(SQLite::Database& database, const char* name) {
  return database.execAndGet(std::string("PRAGMA ") + name).getInt();
}

void copy_before(SQLite::Database& database, const fs::path& file, int schema) {
  // Under its name only when it is whole: a start that fails here must not leave half a copy each time.
  const fs::path part = file.parent_path() / "journal.before-schema.unfinished";
  const std::string stem = "journal.before-schema-" + std::to_string(schema + 1);
  remove_unfinished(part);
  copy_database(database, part, file);
  rename_to_free(part, free_name(file.parent_path() / stem, ".sqlite"));
  make_lasting(file.parent_path());
}

void apply(SQLite::Database& database, const Migration& step) {
  database.exec("BEGIN IMMEDIATE");
  try {
    database.exec(step.sql);
    database.exec("PRAGMA user_version = " + std::to_string(step.from + 1));
    database.exec("COMMIT");
  } catch (const SQLite::Exception&) {
    database.tryExec("ROLLBACK");
    throw;
  }
}

}  // namespace

fs::path restoring_file(const fs::path& file) {
  return file.parent_path() / "journal.restoring.sqlite";
}

void create_if_missing(const fs::path& file, Instant now) {
  std::error_code failure;
  fs::create_directories(file.parent_path(), failure);
  if (fs::exists(restoring_file(file)))
    throw JournalError(
        "A restore of the journal " + file.string() +
            " was interrupted: what it put aside may lack its write-ahead log. Run `agreed restore "
            "CONFIG FILE` once more.",
        false);
  if (fs::exists(file)) {
    if (fs::file_size(file) == 0) throw damaged(file, "it is empty");
    return;
  }
  const fs::path log = with_suffix(file, "-wal");
  if (fs::exists(log) && fs::file_size(log) > 0)
    throw damaged(file, "it is gone, but its write-ahead log " + log.string() + " is still there");
  const fs::path unfinished = with_suffix(file, ".new");
  translating(unfinished, [&] {
    remove_unfinished(unfinished);
    write_new(unfinished, now);
  });
  fs::rename(unfinished, file);
  make_lasting(file.parent_path());
}

void copy_database(SQLite::Database& database, const fs::path& copy, const fs::path& like) {
  make_empty(copy, like);  // SQLite writes into an empty file, and would make one that everybody may read
  SQLite::Statement vacuum(database, "VACUUM INTO ?");
  vacuum.bind(1, copy.string());
  vacuum.exec();
  make_lasting(copy);
}

void check_usable(SQLite::Database& database, const fs::path& file, int schema) {
  translating(file, [&] {
    const int id = pragma(database, "application_id"), version = pragma(database, "user_version");
    std::error_code ignored;
    if (fs::file_size(file, ignored) == 0) throw damaged(file, "it is empty");
    if (id != kApplicationId)
      throw JournalError(file.string() +
                             " is a SQLite database but not a journal of this program. Move it away, or name "
                             "another state folder in the configuration.",
                         false);
    if (version > schema)
      throw JournalError("The journal " + file.string() + " was written by a newer program (schema " +
                             std::to_string(version) + ", this program knows up to " +
                             std::to_string(schema) +
                             "). Install the newer program again, or stop the service and put back a backup "
                             "made before the update with `agreed restore CONFIG FILE`.",
                         false);
    if (version < 1) throw damaged(file, "its schema number is " + std::to_string(version));
    SQLite::Statement meta(database, "SELECT source FROM meta WHERE id = 1");
    if (!meta.executeStep()) throw damaged(file, "the row that names it is gone");
    SQLite::Statement head(database, "SELECT sha256 FROM batches ORDER BY sequence DESC LIMIT 1");
    if (head.executeStep() && head.getColumn(0).getString().size() != 64)
      throw damaged(file, "the hash of its newest batch cannot be read");
  });
}

void migrate(SQLite::Database& database, const fs::path& file, std::span<const Migration> migrations,
             int schema) {
  translating(file, [&] {
    const int found = pragma(database, "user_version");
    if (found == schema) return;
    copy_before(database, file, found);
    for (int version = found; version < schema; ++version) {
      const auto step = std::find_if(migrations.begin(), migrations.end(),
                                     [version](const Migration& m) { return m.from == version; });
      if (step == migrations.end())
        throw JournalError("The journal " + file.string() + " has schema " + std::to_string(version) +
                               ", which this program cannot bring forward.",
                           false);
      apply(database, *step);
    }
  });
}

// Schema 1 is the first, so nothing leads to it.
std::span<const Migration> migrations() {
  return {};
}

}  // namespace agreed::journal
