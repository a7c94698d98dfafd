// How fast the journal alone takes readings: 1,000,000 rows, half checks of 8 charts, half results of 250,000
// pairs, in two files and batches of 10,000.
//   journal_speed FOLDER            inserts them into a new journal in FOLDER and prints rows a second
//   journal_speed --csv A.csv B.csv  writes the same rows as two drop files, for the sqlite3 shell to import
#include <chrono>
#include <cstdio>
#include <fstream>
#include <string>
#include <vector>

#include "core/base/rfc3339.hpp"
#include "daemon/journal/journal.hpp"

namespace {

using namespace agreed;

constexpr int kRows = 500'000;  // of each analyzer
const std::vector<std::string> kAnalyzers = {"line1", "line2"};
const std::vector<std::string> kMeasurands = {"protein", "moisture"};
const std::vector<std::string> kStandards = {"wheat-low", "wheat-high"};
const Instant kStart{std::chrono::sys_days{std::chrono::year{2026} / 1 / 5}};

struct Plain {
  StoredKind kind;
  Instant at;
  std::string measurand, item;
  double value;
};

// Deterministic, with four decimals as an analyzer writes them.
double value_of(int i) {
  return 10.0 + static_cast<double>((static_cast<long>(i) * 7919L) % 10000L) / 10000.0;
}

Plain row_of(int i) {
  const auto step = static_cast<std::size_t>(i);
  const Instant at = kStart + std::chrono::seconds(15) * i;
  if (i % 2 == 0)
    return {StoredKind::check, at, kMeasurands[step / 2 % 2], kStandards[step / 4 % 2], value_of(i)};
  return {StoredKind::split, at, kMeasurands[step / 2 % 2], "S-" + std::to_string(1'000'000 + i / 4),
          value_of(i)};
}

void write_csv(const std::string& name) {
  std::ofstream out(name);
  out << "kind,measured_at,measurand,item,value\n";
  for (int i = 0; i < kRows; ++i) {
    const Plain row = row_of(i);
    out << (row.kind == StoredKind::check ? "check," : "split,") << to_rfc3339(row.at) << ',' << row.measurand
        << ',' << row.item << ',' << row.value << '\n';
  }
}

void insert_file(Journal& journal, const std::string& analyzer, const std::vector<Plain>& rows) {
  journal.begin(kStart);
  const auto file = journal.add_file({analyzer, analyzer + ".csv", analyzer, rows.size(), 0});
  for (std::size_t i = 0; i < rows.size(); ++i) {
    const Plain& row = rows[i];
    JournalReading reading;
    reading.analyzer = analyzer;
    reading.measurand = row.measurand;
    reading.item = row.item;
    reading.kind = row.kind;
    reading.measured_at = row.at;
    reading.value = row.value;
    reading.line = static_cast<std::uint32_t>(i) + 2;
    journal.add_reading(file, reading);
    if ((i + 1) % 10'000 == 0) {
      journal.commit();
      journal.begin(kStart);
    }
  }
  journal.finish_file(file, "done", "");
  journal.commit();
}

double seconds_since(std::chrono::steady_clock::time_point start) {
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
}

void run(const std::string& folder) {
  std::vector<Plain> rows;
  for (int i = 0; i < kRows; ++i) rows.push_back(row_of(i));
  auto start = std::chrono::steady_clock::now();
  {
    Journal journal(folder);
    for (const std::string& analyzer : kAnalyzers) insert_file(journal, analyzer, rows);
  }
  const double taken = seconds_since(start);
  std::printf("insert: %.2f s, %.0f rows/s\n", taken, 2 * kRows / taken);

  start = std::chrono::steady_clock::now();
  Journal journal(folder);
  std::printf("open: %.3f s, %lld accepted\n", seconds_since(start),
              static_cast<long long>(journal.totals().readings_accepted));

  start = std::chrono::steady_clock::now();
  long read = 0;
  for (const auto& analyzer : kAnalyzers)
    for (const auto& measurand : kMeasurands) {
      for (const auto& standard : kStandards)
        journal.each_check(analyzer, standard, measurand, [&](Instant, int, double) { ++read; });
      journal.each_split(analyzer, measurand, [&](std::string_view, Instant, int, double) { ++read; });
    }
  std::printf("read forward: %.2f s, %ld rows\n", seconds_since(start), read);
}

}  // namespace

int main(int count, char** words) {
  if (count == 4 && std::string(words[1]) == "--csv") {
    write_csv(words[2]);
    write_csv(words[3]);
    return 0;
  }
  if (count != 2) return 2;
  run(words[1]);
  return 0;
}
