#include "daemon/intake/csv_rows.hpp"

#include <algorithm>
#include <optional>
#include <vector>

#include "daemon/intake/csv_records.hpp"

namespace agreed {
namespace {

/// Records to rows of the plain format.
class PlainRecords final : public RecordTaker {
 public:
  PlainRecords(const RowMaker& maker, RowTaker& taker) : maker_(maker), taker_(taker) {}

  std::string header(std::span<const std::string_view> names) override {
    names_.assign(names.begin(), names.end());
    columns_.clear();
    raw_ = {};
    std::string fault = header_fault(names_);
    for (const std::string& name : names_) columns_.push_back(plain_column(name));
    return fault;
  }

  void record(std::uint32_t line, std::string_view whole, std::span<const std::string_view> fields) override {
    if (is_header_again(fields)) {
      header(fields);
      return;
    }
    if (fields.size() != columns_.size())
      return taker_.bad(bad_row(line, 0, whole,
                                "the row has " + std::to_string(fields.size()) + " fields; the header has " +
                                    std::to_string(columns_.size())));
    raw_.line = line;
    raw_.whole = whole;
    raw_.others.clear();
    for (std::size_t i = 0; i < columns_.size(); ++i) {
      const auto column = static_cast<std::uint32_t>(i + 1);
      if (columns_[i])
        raw_.fields[static_cast<std::size_t>(*columns_[i])] = {fields[i], column};
      else
        raw_.others.push_back({names_[i], fields[i], column});
    }
    maker_.make(raw_, taker_);
  }

  void bad(BadRow&& row) override { taker_.bad(std::move(row)); }

 private:
  /// Exports that are joined, or that go on after a restart of their program, have further header rows,
  /// perhaps with other columns. A row that names all the needed columns is no result.
  [[nodiscard]] static bool is_header_again(std::span<const std::string_view> fields) {
    return std::find(fields.begin(), fields.end(), name_of(PlainColumn::kind)) != fields.end() &&
           header_fault({fields.begin(), fields.end()}).empty();
  }

  const RowMaker& maker_;
  RowTaker& taker_;
  std::vector<std::optional<PlainColumn>> columns_;
  std::vector<std::string> names_;
  RawRow raw_;
};

}  // namespace

std::unique_ptr<RowFormat> make_csv_rows(const RowMaker& maker, RowTaker& taker) {
  return std::make_unique<RowsThrough<PlainRecords>>(
      PlainRecords(maker, taker), [](PlainRecords& records) { return make_csv_records({}, records); });
}

}  // namespace agreed
