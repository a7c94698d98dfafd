#pragma once
// GET /api/readings: everything that came in, as JSON or as CSV.
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "daemon/journal/journal.hpp"

namespace agreed {

/// {"readings":[...],"next":...}: `next` is the cursor of the following page, null on the last one.
[[nodiscard]] std::string readings_json(const std::vector<ReadingRow>& readings,
                                        const std::optional<std::string>& next);

/// The same as CSV (RFC 4180, header line first). The columns of the plain format come first and under its
/// names, a censored value as <0.05 or >20, as in a drop file; but a cell that begins
/// with = + - or @ and is no plain number gets an apostrophe before it, because spreadsheets would compute
/// it.
[[nodiscard]] std::string readings_csv(const std::vector<ReadingRow>& readings);
/// Its header line, and the lines of some of them, for those who write them piece by piece.
[[nodiscard]] std::string readings_csv_head();
[[nodiscard]] std::string readings_csv_lines(const std::vector<ReadingRow>& readings);

/// A line of such cells.
[[nodiscard]] std::string csv_line(std::span<const std::string> cells);

/// The cell of one text, made harmless and quoted where that is needed.
[[nodiscard]] std::string csv_cell(const std::string& text);

}  // namespace agreed
