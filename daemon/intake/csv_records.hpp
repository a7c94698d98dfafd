#pragma once
// CSV by RFC 4180 as a stream of records; libcsv does the splitting into fields.
#include <cstdint>
#include <memory>
#include <span>
#include <string>
#include <string_view>

#include "daemon/intake/row.hpp"
#include "daemon/intake/row_format.hpp"

namespace agreed {

struct CsvDialect {
  char delimiter = ',';
  int skip_lines = 0;  ///< before the header
  bool header = true;  ///< false: the first record is a row like any other
};

/// What is done with the records of one file.
class RecordTaker {
 public:
  virtual ~RecordTaker() = default;
  /// The header's names; why they cannot be used, or nothing. Never called for a file without a header.
  virtual std::string header(std::span<const std::string_view> names) = 0;
  /// `line`: where it begins; `whole`: as it stands. The views hold until the call returns.
  virtual void record(std::uint32_t line, std::string_view whole,
                      std::span<const std::string_view> fields) = 0;
  virtual void bad(BadRow&& row) = 0;
};

/// Blank lines are skipped, spaces around an unquoted field are cut. A quoted field may run over line ends; a
/// quote that is never closed costs its own line and no other. `taker` must outlive the result.
[[nodiscard]] std::unique_ptr<RowFormat> make_csv_records(const CsvDialect& dialect, RecordTaker& taker);

}  // namespace agreed
