#pragma once
// The columns of the plain format, and a row as it stands in the file before its meaning is worked out.
#include <array>
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/rfc3339.hpp"
#include "daemon/intake/row.hpp"

namespace agreed {

enum class PlainColumn : std::uint8_t {
  kind,
  measured_at,
  measurand,
  item,
  value,
  replicate,
  by,  ///< "operator"
  note,
  analyzer,
  standard,
  x,
  y,
  comparison
};
constexpr std::size_t kPlainColumns = 13;
constexpr std::size_t kMostColumns = 1000;   ///< a file or JSON object with more is refused
constexpr std::size_t kMostTextBytes = 200;  ///< of item, note, operator, a column name, an unknown column
constexpr std::size_t kMostLineBytes = 1U << 20U;
constexpr std::size_t kMostQuotedBytes = 500;  ///< of BadRow::text

[[nodiscard]] std::string_view name_of(PlainColumn column);
[[nodiscard]] std::optional<PlainColumn> plain_column(std::string_view name);

struct RawField {
  std::string_view text;
  std::uint32_t column = 0;  ///< number in its row, from 1; 0 = the row has no such column
};

struct OtherField {
  std::string_view name, text;
  std::uint32_t column = 0;
};

/// How the file itself names and writes the fields of a row that was mapped, for messages; and what the
/// mapping has read already.
struct OwnWords {
  std::array<std::string_view, kPlainColumns> names, written;
  std::string_view result_example;  ///< "12,34, <0,05 or >20"
  ParsedTime time;                  ///< of measured_at
};

struct RawRow {
  std::uint32_t line = 0;
  std::string_view whole;  ///< as read
  std::array<RawField, kPlainColumns> fields;
  std::vector<OtherField> others;  ///< columns the plain format does not know

  const OwnWords* own = nullptr;  ///< of a mapped row

  [[nodiscard]] const RawField& operator[](PlainColumn column) const {
    return fields[static_cast<std::size_t>(column)];
  }
  /// The column as the file names it.
  [[nodiscard]] std::string_view name(PlainColumn column) const;
  /// The field as the file has it.
  [[nodiscard]] std::string_view written(PlainColumn column) const;
};

/// Where parsed rows go, in the order of the file.
class RowTaker {
 public:
  virtual ~RowTaker() = default;
  virtual void good(Row&& row) = 0;
  virtual void bad(BadRow&& row) = 0;
};

/// A bad row with `whole` cut to its limit.
[[nodiscard]] BadRow bad_row(std::uint32_t line, std::uint32_t column, std::string_view whole,
                             std::string reason);

/// What makes a header row unusable, in words; empty if nothing does.
[[nodiscard]] std::string header_fault(const std::vector<std::string>& names);

}  // namespace agreed
