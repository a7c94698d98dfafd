// Every reading of the exports in examples/formats, compared with a list written by hand.
#include <filesystem>
#include <fstream>
#include <set>
#include <sstream>

#include <doctest/doctest.h>

#include "config/config.hpp"
#include "core/base/number_text.hpp"
#include "tests/daemon/intake/read_plain.hpp"

using namespace agreed;
using namespace agreed::testing;
namespace fs = std::filesystem;

namespace {

const fs::path kFolder = fs::path(AGREED_TEST_DATA).parent_path().parent_path() / "examples" / "formats";

std::string content(const fs::path& file) {
  std::ifstream stream(file, std::ios::binary);
  REQUIRE_MESSAGE(stream.good(), file.string());
  return {std::istreambuf_iterator<char>(stream), {}};
}

/// As a line of expected.csv.
std::string line_of(const std::string& file, const Settings& settings, const Row& row) {
  constexpr std::array<const char*, 4> kKinds = {"check", "split", "intervention", "void"};
  constexpr std::array<const char*, 3> kCensored = {"", "below", "above"};
  const bool has_value = row.kind == RowKind::check || row.kind == RowKind::split;
  const std::string note = row.note.find(',') == std::string::npos ? row.note : '"' + row.note + '"';
  std::ostringstream line;
  line << file << ',' << row.line << ',' << settings.of(row.analyzer).id << ','
       << kKinds.at(static_cast<std::size_t>(row.kind)) << ',' << to_rfc3339(row.measured_at) << ','
       << (row.measurand ? settings.of(*row.measurand).id : "") << ',' << row.item << ',' << row.replicate
       << ',' << (has_value ? exact(row.value) : "") << ','
       << kCensored.at(static_cast<std::size_t>(row.censored)) << ',' << row.by << ',' << note << ','
       << (row.clock_ambiguous ? "twice" : "");
  return line.str();
}

std::vector<std::string> lines_of(const fs::path& file, const Config& config) {
  const std::string analyzer = file.stem().string();
  for (std::uint32_t i = 0; i < config.intake.size(); ++i) {
    const IntakeSettings& intake = config.intake[i];
    if (intake.analyzer != analyzer) continue;
    ReadFile read;
    PlainReader reader({*config.settings, AnalyzerIndex{i}, standards_of(*config.settings, {i}),
                        std::make_shared<LocalZone>(intake.zone), intake.not_before,
                        at("2026-03-01T00:00:00Z"), intake.mapped},
                       PlainSyntax::csv, read);
    CHECK(reader.feed(content(file)));
    reader.finish(true);
    CHECK(reader.unusable() == "");
    for (const BadRow& bad : read.bad_rows)
      FAIL_CHECK(file.string() << ':' << bad.line << ": " << bad.reason);
    std::vector<std::string> lines;
    for (const Row& row : read.rows)
      lines.push_back(line_of(file.filename().string(), *config.settings, row));
    return lines;
  }
  FAIL("no analyzer for " << file.string());
  return {};
}

}  // namespace

TEST_CASE("every reading of the example exports is as listed") {
  const ConfigResult result = read_config(kFolder / "mill.yaml");
  for (const ConfigProblem& problem : result.problems) FAIL_CHECK(to_string(problem, "mill.yaml"));
  REQUIRE(result.config.has_value());
  std::vector<std::string> seen, expected;
  std::istringstream list(content(kFolder / "expected.csv"));
  std::set<std::string> files;
  for (std::string line; std::getline(list, line);) expected.push_back(line);
  expected.erase(expected.begin());
  std::vector<std::string> in_order;
  for (const std::string& line : expected)
    if (files.insert(line.substr(0, line.find(','))).second)
      in_order.push_back(line.substr(0, line.find(',')));
  CHECK(files.size() >= 6);
  for (const std::string& file : in_order)
    for (const std::string& line : lines_of(kFolder / file, *result.config)) seen.push_back(line);
  CHECK(seen.size() == expected.size());
  for (std::size_t i = 0; i < std::min(seen.size(), expected.size()); ++i) CHECK(seen[i] == expected[i]);
}
