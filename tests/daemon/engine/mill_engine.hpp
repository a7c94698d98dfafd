#pragma once
// The engine of Harrow Mill on a real journal in a folder of its own; pieces of files are given to it
// directly.
#include <memory>
#include <stdexcept>
#include <string>
#include <utility>
#include <vector>

#include <sqlite3.h>

#include "../../support/eventually.hpp"
#include "../../support/temp_folder.hpp"
#include "config/config.hpp"
#include "daemon/engine/engine.hpp"

namespace agreed::testing {

inline const std::string kBothStandards = R"(site: Harrow Mill
state: state
listen: {address: 127.0.0.1, port: 0}
analyzers:
  line1: {inbox: drop/line1}
  line2: {inbox: drop/line2}
measurands:
  protein: {unit: g/100 g, decimals: 3, decision_levels: [10.5, 13.0], allowable_difference: {absolute: 0.2, percent: 1.5}}
check_standards:
  wheat-high: {lot: 2026-A, measurands: {protein: {}}}
  wheat-low: {lot: 2026-A, measurands: {protein: {}}}
comparisons:
  protein: {measurand: protein, x: line1, y: line2}
)";

/// The same without wheat-high.
inline std::string one_standard() {
  const std::string line = "  wheat-high: {lot: 2026-A, measurands: {protein: {}}}\n";
  std::string text = kBothStandards;
  return text.replace(text.find(line), line.size(), "");
}

inline Instant hour(double h) {
  return Instant{std::chrono::sys_days{std::chrono::year{2026} / 1 / 5}} +
         Duration{static_cast<std::int64_t>(h * 3.6e6)};
}

inline Row check(double h, double value, const std::string& standard = "wheat-low",
                 std::uint32_t analyzer = 0) {
  Row row;
  row.kind = RowKind::check;
  row.measured_at = hour(h);
  row.analyzer = {analyzer};
  row.measurand = MeasurandIndex{0};
  row.item = standard;
  row.standard = StandardIndex{standard == "wheat-high" ? 0U : 1U};
  row.value = value;
  return row;
}

inline Row split(double h, std::uint32_t analyzer, const std::string& sample, double value) {
  Row row = check(h, value, sample, analyzer);
  row.kind = RowKind::split;
  row.standard.reset();
  return row;
}

inline Row take_back(Row row) {
  row.kind = RowKind::void_;
  row.standard.reset();
  return row;
}

inline Row intervention(double h, InterventionKind kind, std::uint32_t analyzer = 0) {
  Row row = check(h, 0, "", analyzer);
  row.kind = RowKind::intervention;
  row.measurand.reset();
  row.standard.reset();
  row.intervention = kind;
  return row;
}

/// A whole file in one piece; rows are numbered as lines after a header.
inline FilePiece file(const std::string& name, std::vector<Row> rows, std::vector<BadRow> bad = {},
                      const std::string& content = "") {
  FilePiece piece;
  piece.file = {{0}, name, 100, 1, content.empty() ? "sha of " + name : content};
  piece.last = true;
  piece.rows = std::move(rows);
  for (std::size_t i = 0; i < piece.rows.size(); ++i) piece.rows[i].line = static_cast<std::uint32_t>(i + 2);
  piece.bad = std::move(bad);
  return piece;
}

inline BadRow bad_row(std::uint32_t line) {
  return {line, 5, "1,5", "found 1,5; a number with a decimal point was expected"};
}

class Mill {
 public:
  Mill() { configure(kBothStandards); }

  void configure(const std::string& text) {
    auto result = parse_config(text, folder_.path() / "agreed.yaml");
    if (!result.config) throw std::runtime_error(to_string(result.problems.at(0), "agreed.yaml"));
    config = std::move(*result.config);
    std::filesystem::create_directories(config.state);
  }
  /// Starts, or starts again as after a crash: what was not committed is gone.
  void start() {
    engine.reset();
    engine = std::make_unique<Engine>(config, std::make_unique<Journal>(config.state));
    engine->start("http://127.0.0.1", [](const std::string&) {});
    for (std::uint32_t i = 0; i < 2; ++i) engine->report({i}, {true, "", 0, true});
    if (!eventually([&] { return engine->snapshot()->ready; })) throw std::runtime_error("not ready in time");
  }
  PieceAnswer give(FilePiece piece) { return engine->submit(std::move(piece)).get(); }
  /// The snapshot after whatever was asked of the engine so far.
  std::shared_ptr<const Snapshot> now() { return engine->snapshot(); }

  /// Lets every commit fail, at its very end, until `repair`.
  void break_journal() {
    sql("CREATE TRIGGER broken BEFORE INSERT ON batches BEGIN SELECT raise(ABORT, 'broken by the test'); "
        "END");
  }
  void repair_journal() { sql("DROP TRIGGER broken"); }

  std::vector<double> values(std::uint32_t chart) {
    std::vector<double> values;
    for (const ChartPoint& point : now()->charts.at(chart)->points) values.push_back(point.value);
    return values;
  }

  Config config;
  std::unique_ptr<Engine> engine;

 private:
  void sql(const char* text) {
    sqlite3* database = nullptr;
    const auto file = (config.state / "journal.sqlite").string();
    int code = sqlite3_open(file.c_str(), &database);
    sqlite3_busy_timeout(database, 5'000);
    if (code == SQLITE_OK) code = sqlite3_exec(database, text, nullptr, nullptr, nullptr);
    const std::string why = sqlite3_errmsg(database);
    sqlite3_close(database);
    if (code != SQLITE_OK) throw std::runtime_error(why);
  }

  TempFolder folder_;
};

}  // namespace agreed::testing
