#pragma once
// CSV by RFC 4180 with a header row; libcsv does the splitting into fields.
#include <memory>

#include "daemon/intake/row_format.hpp"
#include "daemon/intake/row_maker.hpp"

namespace agreed {

/// A further row that names all needed columns is a header too: its columns hold from there on. Blank lines
/// are skipped, spaces around an unquoted field are cut. A quoted field may run over line ends, but no column
/// may hold control characters, so such a row is a bad one; a quote that is never closed costs its own line
/// and no other. References must outlive the result.
[[nodiscard]] std::unique_ptr<RowFormat> make_csv_rows(const RowMaker& maker, RowTaker& taker);

}  // namespace agreed
