#pragma once
// The plain format as CSV with a header row.
#include <memory>

#include "daemon/intake/row_format.hpp"
#include "daemon/intake/row_maker.hpp"

namespace agreed {

/// As make_csv_records; a further row that names all needed columns is a header too: its columns hold from
/// there on; no column may hold control characters, so a row over several lines is a bad one.
/// References must outlive the result.
[[nodiscard]] std::unique_ptr<RowFormat> make_csv_rows(const RowMaker& maker, RowTaker& taker);

}  // namespace agreed
