#pragma once
// A state folder that goes away by itself, and short ways to fill a journal.
#include <filesystem>
#include <stdexcept>
#include <string>
#include <vector>

#include <sqlite3.h>
#include <unistd.h>

#include "daemon/journal/journal.hpp"
#include "tests/support/temp_folder.hpp"

namespace agreed::testing {

/// In memory where that exists: hundreds of commits would each wait for the disk.
inline std::filesystem::path quick_base() {
  const std::filesystem::path memory = "/dev/shm";
  return ::access(memory.c_str(), W_OK) == 0 ? memory : std::filesystem::temp_directory_path();
}

class ScratchFolder {
 public:
  [[nodiscard]] const std::filesystem::path& path() const { return folder_.path(); }
  [[nodiscard]] std::filesystem::path database() const { return path() / "journal.sqlite"; }

 private:
  TempFolder folder_{quick_base()};
};

inline Instant at(std::int64_t seconds) {
  return Instant{std::chrono::sys_days{std::chrono::year{2026} / 1 / 5}} + std::chrono::seconds(seconds);
}

inline JournalReading check(std::string_view item, std::int64_t seconds, double value) {
  JournalReading reading;
  reading.analyzer = "line1";
  reading.measurand = "protein";
  reading.item = item;
  reading.measured_at = at(seconds);
  reading.value = value;
  return reading;
}

inline JournalReading split(std::string_view item, std::int64_t seconds, double value) {
  JournalReading reading = check(item, seconds, value);
  reading.kind = StoredKind::split;
  return reading;
}

inline JournalFile file_of(std::string sha256, std::string analyzer = "line1") {
  return {std::move(analyzer), "results.csv", std::move(sha256), 100, 1};
}

/// Values of line1's protein readings of a check standard, in order.
inline std::vector<double> checks_of(Journal& journal, std::string_view item) {
  std::vector<double> values;
  journal.each_check("line1", item, "protein",
                     [&](Instant, std::int32_t, double value) { values.push_back(value); });
  return values;
}

/// Runs SQL on the database behind the journal's back; throws if it fails.
inline void run_sql(const std::filesystem::path& database, const std::string& sql) {
  sqlite3* handle = nullptr;
  sqlite3_open(database.c_str(), &handle);
  char* error = nullptr;
  const int code = sqlite3_exec(handle, sql.c_str(), nullptr, nullptr, &error);
  const std::string words = error == nullptr ? "" : error;
  sqlite3_free(error);
  sqlite3_close(handle);
  if (code != SQLITE_OK) throw std::runtime_error(words);
}

}  // namespace agreed::testing
