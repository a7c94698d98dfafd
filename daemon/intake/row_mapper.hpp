#pragma once
// One row of an analyzer's own export to rows of the plain format, whatever syntax it came in.
#include <cstdint>
#include <memory>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "config/mapped_format.hpp"
#include "daemon/intake/row_maker.hpp"

namespace agreed {

/// A field of a row; column 0: the row has no such column.
struct SourceCell {
  std::string_view text;
  std::uint32_t column = 0;
  bool number = false;  ///< of JSON: with a point, whatever the format's decimal sign
};

/// Knows the format's columns and gives row_maker its fields: what a row means is decided there and nowhere
/// else. A row with several results gives as many rows; what is wrong with all of them is said once.
class RowMapper {
 public:
  /// References must outlive the mapper.
  RowMapper(const MappedFormat& format, const PlainContext& context, const RowMaker& maker, RowTaker& taker);
  ~RowMapper();
  RowMapper(const RowMapper&) = delete;
  RowMapper& operator=(const RowMapper&) = delete;

  /// The file's columns that are used; the cells of `map` are in their order.
  [[nodiscard]] const std::vector<std::string>& columns() const;
  void map(std::uint32_t line, std::string_view whole, std::span<const SourceCell> cells);

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace agreed
