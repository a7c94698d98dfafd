#pragma once
// Query parameters of /api/files and /api/readings, and the cursor of the latter.
#include <string>

#include "core/base/settings.hpp"
#include "daemon/http/parameters.hpp"
#include "daemon/http/target.hpp"
#include "daemon/journal/journal.hpp"

namespace agreed {

/// outcome, analyzer, limit (1 to 500) and after. A parameter of another name, or one given twice, is an
/// error: otherwise a misspelt filter would let everything through unseen.
[[nodiscard]] Parameter<FileQuery> file_query(const Target& target);

/// analyzer, measurand, standard or sample, kind, from, to, limit (1 to 5000) and after.
[[nodiscard]] Parameter<ReadingQuery> reading_query(const Target& target);

/// What `after` takes to go on behind `row`.
[[nodiscard]] std::string reading_cursor(const ReadingRow& row);

/// Of an answer without a row: the first name asked for that is not configured, with the nearest one; empty
/// when all are. Names of former configurations still have rows, so only an empty answer is in doubt.
[[nodiscard]] std::string unknown_name(const Target& target, const Settings& settings);

/// The target's path and parameters, with `after` set to `cursor`, for a Link header.
[[nodiscard]] std::string next_page(const Target& target, const std::string& cursor);

}  // namespace agreed
