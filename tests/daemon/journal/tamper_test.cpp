// Every single change that can be made to history is found: a cell of each column of each table, a row
// removed, a byte of the file.
#include <filesystem>
#include <random>

#include <doctest/doctest.h>

#include "daemon/journal/verify.hpp"
#include "independent_chain.hpp"

using namespace agreed;
using namespace agreed::testing;
namespace fs = std::filesystem;

namespace {

constexpr unsigned kSeed = 20260105;
constexpr int kReadings = 40;
constexpr int kBytes = 300;

/// A whole journal with all tables filled, and a copy of it to change.
class Victim {
 public:
  Victim() {
    Journal journal(folder_.path());
    fill(journal, kReadings);
  }

  void restore() const {
    for (const char* suffix : {"-wal", "-shm"}) fs::remove(changed().string() + suffix);
    fs::copy_file(folder_.database(), changed(), fs::copy_options::overwrite_existing);
  }
  [[nodiscard]] fs::path whole() const { return folder_.database(); }
  [[nodiscard]] fs::path changed() const { return folder_.path() / "changed.sqlite"; }
  [[nodiscard]] bool is_found() const { return !verify_database(changed()).faults.empty(); }

 private:
  ScratchFolder folder_;
};

/// Changes the value of one cell a little, whatever its type; false if the table's own rules forbid it.
bool change_cell(const fs::path& database, const std::string& table, const std::string& column, int row,
                 std::mt19937& random) {
  const std::string nth = std::to_string(row), c = "\"" + column + "\"";
  const char* const small_changes[] = {
      // one bit of an integer, one unit in the last place of a real, one byte of a text or blob
      "CASE typeof(C) WHEN 'integer' THEN C + 1 WHEN 'real' THEN C * 1.0000000000000003 + 5e-324 "
      "WHEN 'text' THEN substr(C, 1, length(C) / 2) || 'x' || substr(C, length(C) / 2 + 2) "
      "WHEN 'blob' THEN CAST(substr(C, 1, length(C) - 1) AS BLOB) ELSE 7 END",
      "CASE typeof(C) WHEN 'integer' THEN C - 1 WHEN 'real' THEN -C - 1 WHEN 'text' THEN C || ' ' "
      "WHEN 'blob' THEN CAST(C || x'00' AS BLOB) ELSE 0 END",
      "CASE typeof(C) WHEN 'integer' THEN NULL WHEN 'real' THEN C + 0.001 WHEN 'text' THEN '' "
      "WHEN 'blob' THEN x'' ELSE 1 END"};
  std::string change = small_changes[random() % std::size(small_changes)];
  for (std::size_t at = change.find('C'); at != std::string::npos; at = change.find('C', at + 1)) {
    const bool alone = (at == 0 || !std::isalpha(static_cast<unsigned char>(change[at - 1]))) &&
                       (at + 1 == change.size() || !std::isalpha(static_cast<unsigned char>(change[at + 1])));
    if (!alone) continue;
    change.replace(at, 1, c);
    at += c.size() - 1;
  }
  const std::string set = "UPDATE " + table + " SET " + c + " = " + change;
  try {
    // The row is named by its place, so that tables without a rowid are reached too.
    const auto key =
        select(database, "SELECT batch, position FROM " + table + " LIMIT 1 OFFSET " + nth).at(0);
    run_sql(database, set + " WHERE batch = " + key[0] + " AND position = " + key[1]);
    return true;
  } catch (const std::runtime_error&) {
    return false;
  }
}

std::vector<std::string> columns_of(const fs::path& database, const std::string& table) {
  std::vector<std::string> names;
  for (const auto& row : select(database, "SELECT name FROM pragma_table_info('" + table + "')"))
    names.push_back(row[0]);
  return names;
}

int count(const fs::path& database, const std::string& table) {
  return std::stoi(select(database, "SELECT count(*) FROM " + table).at(0).at(0));
}

bool same_history(const fs::path& a, const fs::path& b) {
  try {
    return all_lines(a) == all_lines(b) && head_of(a) == head_of(b);
  } catch (const std::exception&) {
    return false;
  }
}

}  // namespace

TEST_CASE("one cell changed in any column of any history table is found") {
  const Victim victim;
  std::mt19937 random(kSeed);
  int changed = 0;
  for (const auto& [table, fields] : kTables) {
    const int rows = count(victim.whole(), table);
    REQUIRE(rows > 0);
    for (const std::string& column : columns_of(victim.whole(), table)) {
      for (int i = 0; i < 3; ++i) {
        victim.restore();
        const int row = static_cast<int>(random() % static_cast<unsigned>(rows));
        if (!change_cell(victim.changed(), table, column, row, random)) continue;
        if (same_history(victim.whole(), victim.changed()) &&
            select(victim.changed(), "SELECT batch, position FROM " + table) ==
                select(victim.whole(), "SELECT batch, position FROM " + table))
          continue;  // an empty text made empty
        ++changed;
        CAPTURE(table);
        CAPTURE(column);
        CAPTURE(row);
        CHECK(victim.is_found());
      }
    }
  }
  MESSAGE(changed << " cells changed");
  CHECK(changed > 200);
}

TEST_CASE("one row removed from any table is found, the newest and the only one too") {
  const Victim victim;
  for (const auto& [table, fields] : kTables) {
    const int rows = count(victim.whole(), table);
    for (const int row : {0, rows / 2, rows - 1}) {
      victim.restore();
      const auto key = select(victim.whole(), "SELECT batch, position FROM " + table + " LIMIT 1 OFFSET " +
                                                  std::to_string(row))
                           .at(0);
      run_sql(victim.changed(),
              "DELETE FROM " + table + " WHERE batch = " + key[0] + " AND position = " + key[1]);
      CAPTURE(table);
      CAPTURE(row);
      CHECK(victim.is_found());
    }
  }
  for (const char* sql : {"DELETE FROM batches WHERE sequence = 1", "DELETE FROM batches WHERE sequence = 3",
                          "DELETE FROM names WHERE id = 1", "DELETE FROM meta", "DELETE FROM outbox",
                          "UPDATE outbox SET route = 'elsewhere'", "UPDATE outbox SET state = 'delivered'"}) {
    victim.restore();
    run_sql(victim.changed(), sql);
    CAPTURE(sql);
    CHECK(victim.is_found());
  }
}

TEST_CASE("two rows exchanged, and a row brought in anew with all its cells, are found") {
  const Victim victim;
  for (const char* sql :
       {"UPDATE readings SET position = CASE position WHEN 3 THEN 4 ELSE 3 END WHERE batch = 1 AND position "
        "IN (3, 4)",
        "INSERT INTO findings SELECT id + 100, at, kind, subject, body, batch, position + 1000 FROM findings "
        "LIMIT 1",
        "INSERT INTO findings SELECT id + 100, at, kind, subject, body, batch, position FROM findings LIMIT "
        "1",
        "INSERT INTO findings SELECT id + 100, at, kind, subject, body, 0, 1 FROM findings LIMIT 1"}) {
    victim.restore();
    run_sql(victim.changed(), sql);
    CAPTURE(sql);
    CHECK(victim.is_found());
  }
}

TEST_CASE("any byte of the file changed: either history reads the same as before, or it is found") {
  const Victim victim;
  std::mt19937 random(kSeed);
  const std::string whole = read_whole(victim.whole());
  std::vector<std::size_t> written;  // most of the pages is empty
  for (std::size_t i = 0; i < whole.size(); ++i)
    if (whole[i] != 0) written.push_back(i);
  int harmful = 0;
  for (int i = 0; i < kBytes; ++i) {
    const std::size_t where = written[random() % written.size()];
    std::string changed = whole;
    changed[where] = static_cast<char>(changed[where] ^ (1 << (random() % 8)));
    victim.restore();
    write_file(victim.changed(), changed);
    if (same_history(victim.whole(), victim.changed())) continue;
    ++harmful;
    CAPTURE(where);
    bool found = false;
    try {
      found = victim.is_found();
    } catch (const JournalError&) {
      found = true;  // not even a journal any more, and said so
    }
    CHECK(found);
  }
  MESSAGE(harmful << " of " << kBytes << " bytes mattered");
  CHECK(harmful > kBytes / 5);
}

TEST_CASE("a tail cut off or written anew shows against heads kept elsewhere, and only then") {
  const ScratchFolder folder, other;
  std::vector<ChainHead> heads;
  const auto take = [](Journal& journal, int batch, double value) {
    journal.begin(at(batch));
    journal.add_reading(journal.add_file(file_of("sha-" + std::to_string(batch))),
                        check("wheat-low", batch, value));
    journal.commit();
    return journal.head();
  };
  {
    Journal journal(folder.path());
    heads.push_back(journal.head());
    for (int i = 1; i <= 5; ++i) heads.push_back(take(journal, i, i));
  }
  CHECK(verify_journal(folder.path(), heads).faults.empty());
  fs::copy_file(folder.database(), other.database());
  // The newest two batches go, without a trace in the rest.
  for (const char* table : {"readings", "arrivals", "files"})
    run_sql(other.database(), "DELETE FROM " + std::string(table) + " WHERE batch > 3");
  run_sql(other.database(), "DELETE FROM batches WHERE sequence > 3");
  CHECK(verify_journal(other.path()).faults.empty());
  CHECK(verify_journal(other.path(), std::span(heads).first(4)).faults.empty());
  const JournalProof cut = verify_journal(other.path(), heads);
  CHECK(cut.not_found == std::vector<ChainHead>{heads[4], heads[5]});
  CHECK(cut.faults.size() == 2);
  // Written anew with another value, it is as long as before and whole in itself.
  {
    Journal journal(other.path());
    take(journal, 4, 4.5);
    take(journal, 5, 5);
  }
  CHECK(verify_journal(other.path()).faults.empty());
  CHECK(verify_journal(other.path(), heads).not_found == std::vector<ChainHead>{heads[4], heads[5]});
}
