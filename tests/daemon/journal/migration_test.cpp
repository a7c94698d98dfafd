// Bringing a journal forward, copying one and putting one back.
#include <array>
#include <fstream>

#include <doctest/doctest.h>
#include <sys/stat.h>

#include "daemon/journal/backup.hpp"
#include "daemon/journal/connection.hpp"
#include "daemon/journal/schema.hpp"
#include "daemon/journal/verify.hpp"
#include "scratch.hpp"

using namespace agreed;
using namespace agreed::testing;
namespace fs = std::filesystem;

namespace {

ChainHead take_one(const fs::path& folder, const std::string& sha) {
  Journal journal(folder);
  journal.begin(at(0));
  const auto file = journal.add_file(file_of(sha));
  journal.add_reading(file, check("wheat-low", static_cast<std::int64_t>(sha.size()), 1));
  journal.finish_file(file, "done", "");
  journal.commit();
  return journal.head();
}

int schema_of(const fs::path& file) {
  return journal::open_reader(file)->execAndGet("PRAGMA user_version").getInt();
}

unsigned mode_of(const fs::path& file) {
  return static_cast<unsigned>(fs::status(file).permissions());
}

}  // namespace

TEST_CASE("an older schema is brought forward step by step, after a copy") {
  const ScratchFolder folder;
  const ChainHead head = take_one(folder.path(), "a");
  const std::array<journal::Migration, 2> steps = {
      {{1, "CREATE TABLE later(x INTEGER) STRICT"}, {2, "INSERT INTO later VALUES(3)"}}};
  {
    const auto database = journal::open_writer(folder.database());
    journal::migrate(*database, folder.database(), steps, 3);
    CHECK(database->execAndGet("SELECT x FROM later").getInt() == 3);
  }
  CHECK(schema_of(folder.database()) == 3);
  const fs::path copy = folder.path() / "journal.before-schema-2.sqlite";
  REQUIRE(fs::exists(copy));
  const ScratchFolder other;
  fs::copy_file(copy, other.database());
  CHECK(Journal(other.path()).head().sha256 == head.sha256);
  CHECK(verify_journal(other.path()).faults.empty());
}

TEST_CASE("a step that fails changes nothing and says so") {
  const ScratchFolder folder;
  take_one(folder.path(), "a");
  const std::array<journal::Migration, 1> steps = {{{1, "CREATE TABLE later(x INTEGER) STRICT; nonsense"}}};
  {
    const auto database = journal::open_writer(folder.database());
    CHECK_THROWS_AS(journal::migrate(*database, folder.database(), steps, 2), JournalError);
  }
  CHECK(schema_of(folder.database()) == 1);
  CHECK(Journal(folder.path()).totals().readings_accepted == 1);
}

TEST_CASE("a backup made while the journal is open is the journal as of its last commit") {
  const ScratchFolder folder, other;
  const ChainHead head = take_one(folder.path(), "a");
  Journal journal(folder.path());
  journal.begin(at(5));
  journal.add_file(file_of("open"));
  backup_journal(folder.path(), other.database());
  journal.commit();
  CHECK(journal.head().sequence == 2);
  CHECK(Journal(other.path()).head().sha256 == head.sha256);
  CHECK(verify_journal(other.path()).faults.empty());
  CHECK_THROWS_AS(backup_journal(folder.path(), other.database()), JournalError);
}

TEST_CASE("nobody may read a copy of the journal who may not read the journal") {
  const ScratchFolder folder, other;
  take_one(folder.path(), "a");
  const fs::path backup = other.path() / "backup.sqlite", wide = other.path() / "wide.sqlite";
  const mode_t before = ::umask(022);
  fs::permissions(folder.database(), fs::perms(0640));
  backup_journal(folder.path(), backup);
  CHECK(mode_of(backup) == 0640);
  fs::permissions(folder.database(), fs::perms(0600));
  static_cast<void>(restore_journal(folder.path(), backup));
  CHECK(mode_of(folder.database()) == 0600);  // as narrow as what it replaces
  fs::remove(folder.database());
  static_cast<void>(restore_journal(folder.path(), backup));
  CHECK(mode_of(folder.database()) == 0640);  // as the backup where there was nothing
  ::umask(0077);
  fs::permissions(folder.database(), fs::perms(0644));
  backup_journal(folder.path(), wide);
  CHECK(mode_of(wide) == 0600);  // the umask holds besides
  {
    const std::array<journal::Migration, 1> steps = {{{1, "CREATE TABLE later(x INTEGER) STRICT"}}};
    ::umask(022);
    fs::permissions(folder.database(), fs::perms(0640));
    const auto database = journal::open_writer(folder.database());
    journal::migrate(*database, folder.database(), steps, 2);
  }
  CHECK(mode_of(folder.path() / "journal.before-schema-2.sqlite") == 0640);
  ::umask(before);
}

TEST_CASE("restore puts the backup in place and keeps what was there") {
  const ScratchFolder folder, other;
  const ChainHead head = take_one(folder.path(), "a");
  const fs::path backup = other.path() / "backup.sqlite";
  backup_journal(folder.path(), backup);
  take_one(folder.path(), "bb");
  fs::resize_file(folder.database(), 5000);
  std::ofstream(folder.database().string() + "-wal") << "rest";
  const fs::path kept = restore_journal(folder.path(), backup).kept;
  CHECK(fs::file_size(kept) == 5000);
  CHECK(fs::exists(kept.string() + "-wal"));
  CHECK_FALSE(fs::exists(folder.database().string() + "-wal"));
  CHECK(Journal(folder.path()).head().sha256 == head.sha256);
  const fs::path second = restore_journal(folder.path(), backup).kept;
  CHECK(second != kept);
  CHECK(fs::exists(second));
}

TEST_CASE("restore refuses while a service runs, and refuses what is no journal, changing nothing") {
  const ScratchFolder folder, other;
  const ChainHead head = take_one(folder.path(), "a");
  const fs::path backup = other.path() / "backup.sqlite";
  backup_journal(folder.path(), backup);
  SUBCASE("a service runs") {
    const StateLock lock(folder.path());
    CHECK_THROWS_AS(static_cast<void>(restore_journal(folder.path(), backup)), JournalError);
  }
  SUBCASE("garbage") {
    std::ofstream(backup, std::ios::trunc) << std::string(10'000, 'x');
    CHECK_FALSE(restore_journal(folder.path(), backup).proof.faults.empty());
  }
  SUBCASE("cut off") {
    fs::resize_file(backup, fs::file_size(backup) / 2);
    CHECK_FALSE(restore_journal(folder.path(), backup).proof.faults.empty());
  }
  SUBCASE("a row changed") {
    run_sql(backup, "UPDATE readings SET value = 2");
    CHECK_FALSE(restore_journal(folder.path(), backup).proof.faults.empty());
  }
  SUBCASE("missing") {
    CHECK_THROWS_AS(static_cast<void>(restore_journal(folder.path(), other.path() / "none")), JournalError);
  }
  CHECK(Journal(folder.path()).head().sha256 == head.sha256);
}
