#include "daemon/intake/mapped_rows.hpp"

#include <algorithm>
#include <charconv>
#include <optional>
#include <tuple>
#include <utility>

#include "daemon/intake/csv_records.hpp"
#include "daemon/intake/json_rows.hpp"
#include "daemon/intake/nearest_known.hpp"
#include "daemon/intake/row_mapper.hpp"
#include "daemon/intake/text.hpp"
#include "daemon/intake/text_decoder.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

class MappedRecords final : public RecordTaker {
 public:
  MappedRecords(const MappedFormat& format, RowMapper& mapper, RowTaker& taker)
      : format_(format), mapper_(mapper), taker_(taker), cells_(mapper.columns().size()) {
    if (!format.header) use_numbers();
  }

  std::string header(std::span<const std::string_view> names) override {
    if (names.size() > kMostColumns)
      return "the header has " + std::to_string(names.size()) + " columns; at most " +
             std::to_string(kMostColumns) + " are read";
    header_.assign(names.begin(), names.end());
    places_.clear();
    for (const std::string& column : mapper_.columns()) {
      const auto found = std::find(names.begin(), names.end(), column);
      if (found == names.end()) return missing(column);
      if (std::find(found + 1, names.end(), column) != names.end())
        return "the header has the column " + in_quotes(column) + " twice; once was expected";
      places_.push_back(static_cast<std::size_t>(found - names.begin()));
    }
    return {};
  }

  void record(std::uint32_t line, std::string_view whole, std::span<const std::string_view> fields) override {
    if (is_header_again(fields)) return begin_anew(line, whole, fields);
    if (const std::string fault = size_fault(fields); !fault.empty())
      return taker_.bad(bad_row(line, 0, whole, fault));
    for (std::size_t i = 0; i < places_.size(); ++i)
      cells_[i] = {fields[places_[i]], static_cast<std::uint32_t>(places_[i] + 1), false};
    mapper_.map(line, whole, cells_);
  }

  void bad(BadRow&& row) override { taker_.bad(std::move(row)); }

 private:
  void use_numbers() {
    for (const std::string& column : mapper_.columns()) {
      std::size_t number = 1;
      (void)std::from_chars(column.data(), column.data() + column.size(),
                            number);  // the configuration saw to it
      places_.push_back(number - 1);
      least_ = std::max(least_, number);
    }
  }

  [[nodiscard]] std::string missing(const std::string& column) const {
    std::vector<std::string_view> present;
    for (const std::string& name : header_)
      if (!name.empty()) present.emplace_back(name);
    std::string fault = "the header has no column " + in_quotes(column) + ", which the format " + format_.id +
                        " needs; " + known_hint(column, present);
    if (present.size() == 1 && format_.delimiter != ';' && present[0].find(';') != std::string_view::npos)
      fault += " (fields seem to be separated by ';')";
    return fault;
  }

  void begin_anew(std::uint32_t line, std::string_view whole, std::span<const std::string_view> names) {
    const auto before = std::pair(header_, places_);
    std::string fault = header(names);
    if (fault.empty()) return;
    std::tie(header_, places_) = before;
    taker_.bad(bad_row(line, 0, whole, std::move(fault)));
  }

  /// Of an export that was appended to by a program started anew, perhaps with other columns.
  [[nodiscard]] bool is_header_again(std::span<const std::string_view> fields) const {
    return !header_.empty() &&
           std::all_of(mapper_.columns().begin(), mapper_.columns().end(), [&](const auto& column) {
             return std::find(fields.begin(), fields.end(), column) != fields.end();
           });
  }

  /// Empty fields behind the last column come from a delimiter at the end of each line.
  [[nodiscard]] std::string size_fault(std::span<const std::string_view> fields) const {
    const std::size_t expected = format_.header ? header_.size() : least_;
    if (fields.size() == expected || (!format_.header && fields.size() > expected)) return {};
    const auto counts = [](std::string_view field) { return !field.empty(); };
    const bool only_empty_ones_more =
        fields.size() > expected &&
        std::none_of(fields.begin() + static_cast<std::ptrdiff_t>(expected), fields.end(), counts);
    if (only_empty_ones_more) return {};
    return "the row has " + std::to_string(fields.size()) + " fields; " +
           (format_.header ? "the header has " : "at least ") + std::to_string(expected) +
           (format_.header ? "" : " were expected");
  }

  const MappedFormat& format_;
  RowMapper& mapper_;
  RowTaker& taker_;
  std::vector<std::string> header_;
  std::vector<std::size_t> places_;  ///< in a record, of each of the mapper's columns
  std::size_t least_ = 0;            ///< fields of a row without a header
  std::vector<SourceCell> cells_;
};

class MappedObjects final : public ObjectTaker {
 public:
  MappedObjects(RowMapper& mapper, RowTaker& taker)
      : mapper_(mapper), taker_(taker), cells_(mapper.columns().size()) {}

  void object(std::uint32_t line, std::string_view whole, std::span<const JsonMember> members) override {
    std::fill(cells_.begin(), cells_.end(), SourceCell{});
    const auto& columns = mapper_.columns();
    for (std::size_t i = 0; i < members.size(); ++i) {
      const auto found = std::find(columns.begin(), columns.end(), members[i].name);
      if (found != columns.end())
        cells_[static_cast<std::size_t>(found - columns.begin())] = {
            members[i].text, static_cast<std::uint32_t>(i + 1), members[i].number};
    }
    mapper_.map(line, whole, cells_);
  }

  void bad(BadRow&& row) override { taker_.bad(std::move(row)); }

 private:
  RowMapper& mapper_;
  RowTaker& taker_;
  std::vector<SourceCell> cells_;
};

/// Bytes of any character set to rows.
class MappedRows final : public RowFormat {
 public:
  MappedRows(const MappedFormat& format, const PlainContext& context, const RowMaker& maker, RowTaker& taker)
      : format_(format),
        mapper_(format, context, maker, taker),
        records_(format, mapper_, taker),
        objects_(mapper_, taker) {
    if (format.encoding != "utf-8" && format.encoding != "utf-16") decoder_.emplace(format.encoding);
    if (format.syntax == ExportSyntax::csv)
      rows_ = make_csv_records({format.delimiter, format.skip_lines, format.header}, records_);
    else if (format.syntax == ExportSyntax::json_lines)
      rows_ = make_json_line_objects(JsonShape::nested, objects_);
    else
      rows_ = make_json_array_objects(JsonShape::nested, objects_);
  }

  void feed(std::string_view block) override {
    if (!unusable_.empty()) return;
    if (format_.encoding == "utf-16" && !decoder_ && !begin_utf_16(block)) return;
    rows_->feed(decoder_ ? decoder_->decode(block) : block);
    unusable_ = rows_->unusable();
  }

  void pause() override {
    if (unusable_.empty()) rows_->pause();
  }

  void finish(bool closed) override {
    if (!unusable_.empty()) return;
    if (decoder_) rows_->feed(decoder_->finish());
    rows_->finish(closed);
    unusable_ = rows_->unusable();
  }

 private:
  /// The byte order mark says which of the two it is; false while it is not known.
  bool begin_utf_16(std::string_view& block) {
    begin_.append(block);
    if (begin_.size() < 2) return false;
    if (begin_.starts_with("\xFF\xFE"))
      decoder_.emplace("utf-16le");
    else if (begin_.starts_with("\xFE\xFF"))
      decoder_.emplace("utf-16be");
    else
      unusable_ =
          "the file begins without the byte order mark of UTF-16; if it has none, the encoding of "
          "format " +
          format_.id + " is utf-16le or utf-16be";
    block = begin_;
    return unusable_.empty();
  }

  const MappedFormat& format_;
  RowMapper mapper_;
  MappedRecords records_;
  MappedObjects objects_;
  std::optional<TextDecoder> decoder_;
  std::string begin_;  ///< of a file in UTF-16
  std::unique_ptr<RowFormat> rows_;
};

}  // namespace

std::unique_ptr<RowFormat> make_mapped_rows(const MappedFormat& format, const PlainContext& context,
                                            const RowMaker& maker, RowTaker& taker) {
  return std::make_unique<MappedRows>(format, context, maker, taker);
}

}  // namespace agreed
