// Journals that must not be used, locks, and a database that another process holds.
#include <fstream>

#include <doctest/doctest.h>
#include <sys/wait.h>

#include "scratch.hpp"

using namespace agreed;
using namespace agreed::testing;
namespace fs = std::filesystem;

namespace {

void make_journal(const ScratchFolder& folder) {
  Journal journal(folder.path());
  journal.begin(at(0));
  const auto file = journal.add_file(file_of("a"));
  for (int i = 0; i < 2000; ++i) journal.add_reading(file, check("wheat-low", i, i));
  journal.finish_file(file, "done", "");
  journal.commit();
}

/// Opens the journal, which must be refused for good; the words.
std::string refusal(const ScratchFolder& folder) {
  try {
    const Journal journal(folder.path());
  } catch (const JournalError& error) {
    CHECK_FALSE(error.retry);
    return error.what();
  }
  return "not refused";
}

bool has(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

}  // namespace

TEST_CASE("a newer schema is refused, for writing and for reading, and left as it is") {
  const ScratchFolder folder;
  make_journal(folder);
  run_sql(folder.database(), "PRAGMA user_version = 99");
  const std::string words = refusal(folder);
  CHECK(has(words, "newer program"));
  CHECK(has(words, "schema 99"));
  CHECK(has(words, "agreed restore"));
  CHECK_THROWS_AS(JournalReader(folder.path()), JournalError);
  run_sql(folder.database(), "PRAGMA user_version = 1");
  CHECK(Journal(folder.path()).totals().readings_accepted == 2000);
}

TEST_CASE("garbage, an emptied file and a cut-off file are refused with the way to restore") {
  const ScratchFolder folder;
  make_journal(folder);
  SUBCASE("garbage") {
    std::ofstream(folder.database(), std::ios::trunc) << std::string(8192, 'x');
  }
  SUBCASE("emptied") {
    fs::resize_file(folder.database(), 0);
  }
  SUBCASE("cut off in the middle") {
    fs::resize_file(folder.database(), fs::file_size(folder.database()) / 2);
  }
  SUBCASE("cut off within the first page") {
    fs::resize_file(folder.database(), 1000);
  }
  SUBCASE("first page overwritten behind the header") {
    std::fstream out(folder.database(), std::ios::in | std::ios::out | std::ios::binary);
    out.seekp(100);
    out << std::string(3996, '\xee');
  }
  SUBCASE("gone, with its write-ahead log left") {
    fs::remove(folder.database());
    std::ofstream(folder.database().string() + "-wal") << "rest";
  }
  const std::string words = refusal(folder);
  CAPTURE(words);
  CHECK(has(words, "damaged"));
  CHECK(has(words, "agreed restore"));
  CHECK(has(words, folder.database().string()));
}

TEST_CASE("another program's database is refused") {
  const ScratchFolder folder;
  run_sql(folder.database(), "CREATE TABLE t(x)");
  CHECK(has(refusal(folder), "not a journal of this program"));
}

TEST_CASE("a creation that was cut off is begun again") {
  const ScratchFolder folder;
  std::ofstream(folder.database().string() + ".new") << "half";
  CHECK(Journal(folder.path()).head().sequence == 0);
  CHECK_FALSE(fs::exists(folder.database().string() + ".new"));
}

TEST_CASE("the state folder is made if it is missing") {
  const ScratchFolder folder;
  CHECK(Journal(folder.path() / "a" / "b").head().sequence == 0);
}

TEST_CASE("a reader of a journal that is not there is refused") {
  const ScratchFolder folder;
  CHECK_THROWS_AS(JournalReader(folder.path()), JournalError);
  CHECK_FALSE(fs::exists(folder.database()));
}

TEST_CASE("the second service on a state folder is told who holds it; the lock goes with its holder") {
  const ScratchFolder folder;
  {
    const StateLock first(folder.path());
    std::string words;
    try {
      const StateLock second(folder.path());
    } catch (const JournalError& error) {
      words = error.what();
      CHECK_FALSE(error.retry);
    }
    CHECK(has(words, "process " + std::to_string(::getpid())));
    CHECK(has(words, folder.path().string()));
  }
  CHECK_NOTHROW(StateLock(folder.path()));
}

TEST_CASE("a database locked by another process: the batch is to be retried, and then works") {
  const ScratchFolder folder;
  Journal journal(folder.path());
  int ready[2], done[2];
  REQUIRE(::pipe(ready) == 0);
  REQUIRE(::pipe(done) == 0);
  const pid_t other = ::fork();
  if (other == 0) {
    sqlite3* handle = nullptr;
    sqlite3_open(folder.database().c_str(), &handle);
    sqlite3_exec(handle, "BEGIN IMMEDIATE", nullptr, nullptr, nullptr);
    char byte = 0;
    static_cast<void>(!::write(ready[1], "x", 1));
    static_cast<void>(!::read(done[0], &byte, 1));
    ::_exit(0);
  }
  char byte = 0;
  REQUIRE(::read(ready[0], &byte, 1) == 1);
  try {
    journal.begin(at(0));
    FAIL("the lock was not noticed");
  } catch (const JournalError& error) {
    CHECK(error.retry);
    CHECK(has(error.what(), "locked"));
  }
  REQUIRE(::write(done[1], "x", 1) == 1);
  REQUIRE(::waitpid(other, nullptr, 0) == other);
  for (const int descriptor : {ready[0], ready[1], done[0], done[1]}) ::close(descriptor);
  journal.begin(at(0));
  journal.finish_file(journal.add_file(file_of("a")), "done", "");
  journal.commit();
  CHECK(journal.totals().files_done == 1);
}
