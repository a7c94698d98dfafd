#pragma once
// Reads a text as a file of the plain format, in blocks of any size.
#include <algorithm>
#include <string>
#include <string_view>
#include <vector>

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
  while (!text.empty() && reader.feed(text.substr(0, how.block)))
    text.remove_prefix(std::min(how.block, text.size()));
  reader.finish(how.closed);
  file.unusable = reader.unusable();
  return file;
}

}  // namespace agreed::testing
