#pragma once
// The canonical text and the chain worked out again from what README.md of daemon/journal says and from
// nothing of the journal's own code; and a journal with something in every table.
#include <array>
#include <bit>
#include <cstdio>
#include <map>
#include <stdexcept>
#include <string>
#include <utility>
#include <vector>

#include <openssl/sha.h>

#include "scratch.hpp"

namespace agreed::testing {

inline std::string sha256_of(const std::string& text) {
  std::array<unsigned char, SHA256_DIGEST_LENGTH> hash{};
  SHA256(reinterpret_cast<const unsigned char*>(text.data()), text.size(), hash.data());
  std::string hex;
  for (const unsigned char byte : hash) {
    std::array<char, 3> two{};
    std::snprintf(two.data(), two.size(), "%02x", byte);
    hex += two.data();
  }
  return hex;
}

inline std::string escaped(const std::string& text) {
  std::string out;
  for (const char c : text) {
    if (c == '\\')
      out += "\\\\";
    else if (c == '\t')
      out += "\\t";
    else if (c == '\n')
      out += "\\n";
    else
      out += c;
  }
  return out;
}

inline std::string field(sqlite3_stmt* row, int column) {
  switch (sqlite3_column_type(row, column)) {
    case SQLITE_NULL:
      return "";
    case SQLITE_INTEGER:
      return std::to_string(sqlite3_column_int64(row, column));
    case SQLITE_FLOAT: {
      std::array<char, 20> hex{};
      std::snprintf(
          hex.data(), hex.size(), "%llx",
          static_cast<unsigned long long>(std::bit_cast<std::uint64_t>(sqlite3_column_double(row, column))));
      return hex.data();
    }
    default: {
      const auto* bytes = static_cast<const char*>(sqlite3_column_blob(row, column));
      const auto length = static_cast<std::size_t>(sqlite3_column_bytes(row, column));
      return length == 0 ? "" : escaped(std::string(bytes, length));
    }
  }
}

using Rows = std::vector<std::vector<std::string>>;

inline Rows select(const std::filesystem::path& database, const std::string& sql) {
  sqlite3* handle = nullptr;
  sqlite3_open_v2(database.c_str(), &handle, SQLITE_OPEN_READONLY, nullptr);
  sqlite3_stmt* statement = nullptr;
  int code = sqlite3_prepare_v2(handle, sql.c_str(), -1, &statement, nullptr);
  Rows rows;
  while (code == SQLITE_OK || code == SQLITE_ROW) {
    code = sqlite3_step(statement);
    if (code != SQLITE_ROW) break;
    rows.emplace_back();
    for (int i = 0; i < sqlite3_column_count(statement); ++i) rows.back().push_back(field(statement, i));
  }
  sqlite3_finalize(statement);
  sqlite3_close(handle);
  if (code != SQLITE_DONE) throw std::runtime_error("cannot be read: " + sql);
  return rows;
}

/// Table and its fields as README.md lists them, every column by name.
inline const std::vector<std::pair<std::string, std::string>> kTables = {
    {"files", "id, ANALYZER, name, sha256, size, mtime_ns"},
    {"file_outcomes", "file, outcome, reason"},
    {"arrivals", "file, ANALYZER, accepted, repeated, rejected, voided, censored, newest_measured_at"},
    {"readings",
     "ANALYZER, kind, MEASURAND, item, measured_at, replicate, revision, value, censored, file, line, by, "
     "note, "
     "flags"},
    {"voids", "ANALYZER, kind, MEASURAND, item, measured_at, replicate, revision, file, line, by, note"},
    {"interventions", "id, analyzer, standard, measurand, kind, at, by, note, file"},
    {"rejected_rows", "id, file, line, field, text, reason"},
    {"findings", "id, at, kind, subject, body"},
    {"alert_transitions", "id, alert, at, change, state, body"},
    {"messages", "id, webhook_id, route, type, body, alert, created_at, due_at"},
    {"delivery_tries", "id, message, at, status, error, delivered, given_up, next_due"},
    {"resends", "id, message, at"},
    {"configurations", "id, at, sha256, text"},
};

inline std::string with_names(std::string fields) {
  for (const auto& [word, column] : {std::pair("ANALYZER", "analyzer"), std::pair("MEASURAND", "measurand")})
    if (const auto found = fields.find(word); found != std::string::npos)
      fields.replace(found, std::string(word).size(),
                     std::string("(SELECT n.text FROM names n WHERE n.id = ") + column + ")");
  return fields;
}

/// (batch, position) -> line
inline std::map<std::pair<long, long>, std::string> all_lines(const std::filesystem::path& database) {
  std::map<std::pair<long, long>, std::string> lines;
  for (const auto& [table, fields] : kTables)
    for (const auto& row :
         select(database, "SELECT batch, position, " + with_names(fields) + " FROM " + table)) {
      std::string line = table;
      for (std::size_t i = 2; i < row.size(); ++i) line += "\t" + row[i];
      lines[{std::stol(row[0]), std::stol(row[1])}] = line + "\n";
    }
  return lines;
}

/// The head's hash, worked out from the rows alone.
inline std::string head_of(const std::filesystem::path& database) {
  const auto meta = select(database, "SELECT source, created_at FROM meta").at(0);
  std::string head = sha256_of("batch\t0\t" + meta[0] + "\t" + meta[1] + "\n");
  const auto lines = all_lines(database);
  for (const auto& batch : select(database, "SELECT sequence, committed_at FROM batches ORDER BY sequence")) {
    std::string text = "batch\t" + batch[0] + "\t" + head + "\t" + batch[1] + "\n";
    for (const auto& [place, line] : lines)
      if (place.first == std::stol(batch[0])) text += line;
    head = sha256_of(text);
  }
  return head;
}

/// Something in every table, with texts and numbers that are hard to write.
inline void fill(Journal& journal, int readings = 1500) {
  journal.begin(at(0));
  JournalFile file = file_of("sha-1");
  file.name = std::string("tab\t line\n back\\ nul\0 \xff.csv", 27);
  const auto id = journal.add_file(file);
  for (int i = 0; i < readings; ++i) journal.add_reading(id, check("wheat-low", i, 10.0 + i * 0.1));
  JournalReading odd = split("S\t1", -5, -1e-300);
  odd.note = "a\\b\nc";
  odd.by = "J. Miller";
  odd.censored = 1;
  odd.replicate = -3;
  odd.clock_ambiguous = true;
  journal.add_reading(id, odd);
  journal.add_reading(id, check("wheat-high", 0, -0.0));
  journal.commit();

  journal.begin(at(1));
  journal.add_reading(id, check("wheat-low", 0, 10.0));
  journal.add_reading(id, check("wheat-low", 1, 99));
  journal.add_rejected_row(id, 9, 0, std::string("\0\t", 2), "conflict");
  journal.add_void(id, check("wheat-low", 1, 0));
  journal.add_reading(id, check("wheat-low", 1, 99));
  journal.add_intervention(id, {0, "line1", "", "protein", "repaired", "", "lamp", at(1)});
  journal.add_intervention(0, {0, "line1", "", "protein", "noted", "", "", at(1)});
  journal.finish_file(id, "done", "");
  journal.finish_file(journal.add_file(file_of("sha-2", "line2")), "rejected", "empty");
  journal.commit();

  journal.begin(at(2));
  journal.add_finding(at(2), "agreement_lost", "protein", "{}");
  journal.add_transition({1, at(2), "opened", "{}"});
  const auto message = journal.add_message({0, "msg_1", "r", "t", "{}", 1, at(2), at(3), 0});
  journal.add_try({message, at(4), 0, "no answer", false, false, at(9)});
  journal.add_try({message, at(9), 200, "", true, false, std::nullopt});
  journal.send_again("msg_1", at(20));
  journal.add_configuration("site: Harrow Mill\n", "c0", at(2));
  journal.commit();
}

}  // namespace agreed::testing
