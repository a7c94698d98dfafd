#pragma once
// Reads a text as a file of the plain format, in blocks of any size.
#include <algorithm>
#include <string>
#include <string_view>
#include <vector>

#include <doctest/doctest.h>

#include "core/base/rfc3339.hpp"
#include "daemon/intake/plain_reader.hpp"
#include "tests/support/harrow_mill.hpp"

namespace agreed::testing {

struct ReadFile : RowTaker {
  std::vector<Row> rows;
  std::vector<BadRow> bad_rows;
  std::string unusable;

  void good(Row&& row) override { rows.push_back(std::move(row)); }
  void bad(BadRow&& row) override { bad_rows.push_back(std::move(row)); }
};

inline Instant at(const char* text) {
  return parse_rfc3339(text).value().at;
}

/// The one bad row that `row`, the second line of a file, makes.
inline BadRow only_bad_row(const ReadFile& file, const std::string& row) {
  CAPTURE(row);
  CHECK(file.unusable == "");
  CHECK(file.rows.empty());
  REQUIRE(file.bad_rows.size() == 1);
  CHECK(file.bad_rows[0].line == 2);
  CHECK(file.bad_rows[0].text == row);
  return file.bad_rows[0];
}

/// Gives all of `text` to the reader, whose taker is `file`.
inline void read_all(PlainReader& reader, std::string_view text, std::size_t block, bool closed,
                     ReadFile& file) {
  while (!text.empty() && reader.feed(text.substr(0, block)))
    text.remove_prefix(std::min(block, text.size()));
  reader.finish(closed);
  file.unusable = reader.unusable();
}

struct HowToRead {
  PlainSyntax syntax = PlainSyntax::csv;
  std::string zone = "Europe/Dublin";
  bool closed = true;
  std::size_t block = 64 * 1024;
};

/// In the folder of line1, with "now" 2026-03-01.
inline ReadFile read_plain(std::string_view text, const HowToRead& how = {}) {
  static const Settings settings = harrow_mill();
  ReadFile file;
  PlainContext context{settings,
                       AnalyzerIndex{0},
                       standards_of(settings, {0}),
                       std::make_shared<LocalZone>(how.zone),
                       at("2000-01-01T00:00:00Z"),
                       at("2026-03-01T00:00:00Z")};
  PlainReader reader(context, how.syntax, file);
  read_all(reader, text, how.block, how.closed, file);
  return file;
}

}  // namespace agreed::testing
