#include "daemon/journal/tallies.hpp"

#include <algorithm>

namespace agreed::journal {
namespace {

Instant instant(const SQLite::Column& column) {
  return Instant{Duration{column.getInt64()}};
}

void load_readings(SQLite::Database& database, IntakeTotals& totals) {
  SQLite::Statement sums(database,
                         "SELECT coalesce(sum(accepted), 0), coalesce(sum(repeated), 0), "
                         "coalesce(sum(rejected), 0), coalesce(sum(voided), 0), coalesce(sum(censored), 0) "
                         "FROM arrivals");
  sums.executeStep();
  totals.readings_accepted = sums.getColumn(0).getInt64();
  totals.readings_repeated = sums.getColumn(1).getInt64();
  totals.readings_rejected = sums.getColumn(2).getInt64();
  totals.readings_voided = sums.getColumn(3).getInt64();
  totals.readings_censored = sums.getColumn(4).getInt64();
}

void load_files(SQLite::Database& database, IntakeTotals& totals) {
  SQLite::Statement counts(database,
                           "SELECT count(*) FILTER (WHERE outcome = 'done'), "
                           "count(*) FILTER (WHERE outcome = 'repeated'), "
                           "count(*) FILTER (WHERE outcome = 'rejected') FROM file_outcomes");
  counts.executeStep();
  totals.files_done = counts.getColumn(0).getInt64();
  totals.files_repeated = counts.getColumn(1).getInt64();
  totals.files_rejected = counts.getColumn(2).getInt64();
  SQLite::Statement newest(database,
                           "SELECT committed_at FROM batches WHERE sequence = (SELECT max(batch) FROM "
                           "(SELECT max(batch) AS batch FROM files UNION ALL SELECT max(batch) FROM arrivals "
                           "UNION ALL SELECT max(batch) FROM file_outcomes))");
  if (newest.executeStep()) totals.last_commit_at = instant(newest.getColumn(0));
}

std::map<std::int64_t, Instant> load_newest_measured_at(SQLite::Database& database) {
  std::map<std::int64_t, Instant> newest;
  SQLite::Statement rows(
      database,
      "SELECT analyzer, max(newest_measured_at) FROM arrivals WHERE accepted > 0 GROUP BY analyzer");
  while (rows.executeStep()) newest[rows.getColumn(0).getInt64()] = instant(rows.getColumn(1));
  return newest;
}

}  // namespace

// Looked for from the end: rows of one file come together.
Arrival& Tallies::of(std::int64_t file, std::int64_t analyzer) {
  const auto found = std::find_if(arrivals.rbegin(), arrivals.rend(),
                                  [&](const Arrival& a) { return a.file == file && a.analyzer == analyzer; });
  if (found != arrivals.rend()) return *found;
  took_in = true;
  arrivals.push_back({file, analyzer, 0, 0, 0, 0, 0, std::nullopt});
  return arrivals.back();
}

void Tallies::accept(std::int64_t file, std::int64_t analyzer, Instant measured_at, bool censored) {
  Arrival& arrival = of(file, analyzer);
  ++arrival.accepted;
  ++totals.readings_accepted;
  if (censored) {
    ++arrival.censored;
    ++totals.readings_censored;
  }
  arrival.newest_measured_at = std::max(arrival.newest_measured_at.value_or(measured_at), measured_at);
  Instant& newest = newest_measured_at.try_emplace(analyzer, measured_at).first->second;
  newest = std::max(newest, measured_at);
}

void Tallies::repeat(std::int64_t file, std::int64_t analyzer) {
  ++of(file, analyzer).repeated;
  ++totals.readings_repeated;
}

void Tallies::reject(std::int64_t file, std::int64_t analyzer) {
  ++of(file, analyzer).rejected;
  ++totals.readings_rejected;
}

void Tallies::take_back(std::int64_t file, std::int64_t analyzer) {
  ++of(file, analyzer).voided;
  ++totals.readings_voided;
}

void Tallies::finish_file(std::string_view outcome) {
  took_in = true;
  if (outcome == "done") ++totals.files_done;
  if (outcome == "repeated") ++totals.files_repeated;
  if (outcome == "rejected") ++totals.files_rejected;
}

Tallies load_tallies(SQLite::Database& database) {
  Tallies tallies;
  load_readings(database, tallies.totals);
  load_files(database, tallies.totals);
  tallies.newest_measured_at = load_newest_measured_at(database);
  return tallies;
}

}  // namespace agreed::journal
