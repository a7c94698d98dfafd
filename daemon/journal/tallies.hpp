#pragma once
// The journal's totals in memory. What a batch adds is written as `arrivals` rows, one per file and analyzer,
// from which they are summed up again when the journal is opened. Private to daemon/journal.
#include <cstdint>
#include <map>
#include <optional>
#include <string_view>
#include <vector>

#include "daemon/journal/connection.hpp"

namespace agreed::journal {

/// What one batch took from one file for one analyzer.
struct Arrival {
  std::int64_t file = 0, analyzer = 0;
  std::int64_t accepted = 0, repeated = 0, rejected = 0, voided = 0, censored = 0;
  std::optional<Instant> newest_measured_at;
};

/// A value, so that a rolled-back batch is undone by putting the earlier copy back.
struct Tallies {
  IntakeTotals totals;
  std::map<std::int64_t, Instant> newest_measured_at;  ///< by analyzer
  std::vector<Arrival> arrivals;                       ///< of the open batch, in order of arrival
  bool took_in = false;                                ///< the open batch concerns a file

  void accept(std::int64_t file, std::int64_t analyzer, Instant measured_at, bool censored);
  void repeat(std::int64_t file, std::int64_t analyzer);
  void reject(std::int64_t file, std::int64_t analyzer);
  void take_back(std::int64_t file, std::int64_t analyzer);
  void begin_file() { took_in = true; }
  void finish_file(std::string_view outcome);

 private:
  Arrival& of(std::int64_t file, std::int64_t analyzer);
};

[[nodiscard]] Tallies load_tallies(SQLite::Database& database);

}  // namespace agreed::journal
