#include "daemon/intake/row_mapper.hpp"

#include <algorithm>
#include <array>
#include <optional>
#include <unordered_map>
#include <utility>

#include <re2/re2.h>

#include "core/base/ascii.hpp"
#include "core/base/time_pattern.hpp"
#include "daemon/intake/nearest_known.hpp"
#include "daemon/intake/result_style.hpp"
#include "daemon/intake/text.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

using Column = PlainColumn;

constexpr std::size_t at(Column column) {
  return static_cast<std::size_t>(column);
}

RE2::Options quiet() {
  RE2::Options options;
  options.set_log_errors(false);
  return options;
}

/// Passes rows on and remembers the place of the last bad one.
class Watched final : public RowTaker {
 public:
  explicit Watched(RowTaker& taker) : taker_(taker) {}
  void good(Row&& row) override { taker_.good(std::move(row)); }
  void bad(BadRow&& row) override {
    bad_column = row.column;
    taker_.bad(std::move(row));
  }
  std::optional<std::uint32_t> bad_column;

 private:
  RowTaker& taker_;
};

/// A result column: where it is and how its numbers are written.
struct ResultSlot {
  Column column = Column::value;
  std::size_t slot = 0;
  std::string measurand;  ///< of a wide format
  ResultStyle style;
  ResultStyle json_style;  ///< of a JSON number
};

struct FieldSlot {
  Column column;
  std::size_t slot;
};

/// Texts on the instrument to names here.
using Names = std::unordered_map<std::string, std::string>;

Names names_of(const std::map<std::string, std::string>& map) {
  return {map.begin(), map.end()};
}

}  // namespace

struct RowMapper::Impl {
  const MappedFormat& format;
  const PlainContext& context;
  const RowMaker& maker;
  RowTaker& taker;

  std::vector<std::string> columns{};
  std::vector<std::size_t> time_slots{};
  std::optional<std::size_t> item_slot{}, kind_slot{}, measurand_slot{}, skip_slot{};
  std::vector<ResultSlot> results{};
  std::vector<FieldSlot> fields{};
  std::vector<std::size_t> notes{};
  Names items{}, kinds{}, measurands{};
  std::optional<TimePattern> time_pattern{};
  std::unique_ptr<RE2> check_pattern{}, skip_pattern{};
  std::string time_name{}, result_example{};
  bool wide = false;

  RawRow raw{};
  OwnWords own{};
  std::span<const SourceCell> cells{};
  std::string time_text{}, key{};
  std::array<std::string, 2> rooms{};  ///< for numbers rewritten: a pair has two in one row

  void learn() {
    raw.own = &own;
    for (const std::string& column : format.time.columns) {
      time_slots.push_back(slot_of(column));
      time_name += (time_name.empty() ? "" : " ") + column;
    }
    if (!format.time.pattern.empty()) time_pattern.emplace(format.time.pattern);
    if (format.item) item_slot = slot_of(*format.item);
    if (format.kind.column) kind_slot = slot_of(*format.kind.column);
    if (format.measurand) measurand_slot = slot_of(*format.measurand);
    items = names_of(format.items);
    kinds = names_of(format.kind.words);
    measurands = names_of(format.measurands);
    if (format.kind.check_pattern) check_pattern = std::make_unique<RE2>(*format.kind.check_pattern, quiet());
    learn_results();
    learn_others();
    name_columns();
  }

  void learn_results() {
    wide = !format.values.empty();
    for (const MeasurandColumn& value : format.values)
      add_result(Column::value, value.result, value.measurand);
    if (format.value) add_result(Column::value, *format.value, "");
    if (format.x) add_result(Column::x, *format.x, "");
    if (format.y) add_result(Column::y, *format.y, "");
  }

  void add_result(Column column, const ResultColumn& source, const std::string& measurand) {
    results.push_back({column, slot_of(source.column), measurand,
                       ResultStyle(format.decimal, format.thousands, source.factor),
                       ResultStyle('.', "", source.factor)});
    result_example = results.back().style.example();
  }

  void learn_others() {
    for (const auto& [name, source] : format.columns)
      if (const auto column = plain_column(name)) fields.push_back({*column, slot_of(source)});
    for (const auto& [name, text] : format.constants)
      if (const auto column = plain_column(name)) raw.fields[at(*column)] = {text, 0};
    for (const std::string& column : format.notes) notes.push_back(slot_of(column));
    if (!format.skip_rows) return;
    skip_slot = slot_of(format.skip_rows->column);
    skip_pattern = std::make_unique<RE2>(format.skip_rows->pattern, quiet());
  }

  void name_columns() {
    own.result_example = result_example;
    own.names[at(Column::measured_at)] = time_name;
    if (item_slot) own.names[at(Column::item)] = columns[*item_slot];
    if (kind_slot) own.names[at(Column::kind)] = columns[*kind_slot];
    if (measurand_slot) own.names[at(Column::measurand)] = columns[*measurand_slot];
    for (const FieldSlot& field : fields) own.names[at(field.column)] = columns[field.slot];
    for (const ResultSlot& result : results) own.names[at(result.column)] = columns[result.slot];
  }

  std::size_t slot_of(const std::string& column) {
    const auto found = std::find(columns.begin(), columns.end(), column);
    if (found != columns.end()) return static_cast<std::size_t>(found - columns.begin());
    columns.push_back(column);
    return columns.size() - 1;
  }

  // ---- One row ----

  void map() {
    if (skip_slot && RE2::PartialMatch(view(cell(*skip_slot)), *skip_pattern)) return;
    if (!(time() && item() && kind() && measurand())) return;
    others();
    if (wide)
      wide_results();
    else
      single_result();
  }

  [[nodiscard]] std::string_view cell(std::size_t slot) const { return ascii::trimmed(cells[slot].text); }
  [[nodiscard]] static re2::StringPiece view(std::string_view text) { return {text.data(), text.size()}; }

  bool refuse(std::size_t slot, std::string_view name, std::string reason) {
    taker.bad(bad_row(raw.line, cells[slot].column, raw.whole, printable(name) + ": " + std::move(reason)));
    return false;
  }

  void set(Column column, std::size_t slot, std::string_view text) {
    raw.fields[at(column)] = {text, cells[slot].column};
    own.written[at(column)] = cell(slot);
  }

  bool time() {
    std::string_view text = cell(time_slots[0]);
    if (time_slots.size() > 1) {
      time_text.assign(text).append(" ").append(cell(time_slots[1]));
      text = time_text;
    }
    const auto parsed = time_pattern ? time_pattern->parse(text) : parse_rfc3339(text);
    if (!parsed)
      return refuse(time_slots[0], time_name,
                    in_quotes(text) + " is no time as expected; one like " +
                        (time_pattern ? time_pattern->example() : "2026-01-05T06:00:00Z") + " was expected");
    set(Column::measured_at, time_slots[0], text);
    own.written[at(Column::measured_at)] = text;
    own.time = *parsed;
    return true;
  }

  /// The text translated; nothing if the names do not have it.
  const std::string* translated(const Names& names, std::string_view text) {
    if (names.empty()) return nullptr;
    const auto found = names.find(key.assign(text));
    return found == names.end() ? nullptr : &found->second;
  }

  bool item() {
    if (!item_slot) return true;
    const std::string_view text = cell(*item_slot);
    const std::string* name = translated(items, text);
    set(Column::item, *item_slot, name != nullptr ? std::string_view(*name) : text);
    return true;
  }

  bool kind() {
    std::string_view kind = format.kind.otherwise;
    if (kind_slot) {
      const std::string_view text = cell(*kind_slot);
      const std::string* meaning = translated(kinds, text);
      if (meaning == nullptr && !kinds.empty()) return refuse_unknown(*kind_slot, text, kinds, {});
      set(Column::kind, *kind_slot, meaning != nullptr ? std::string_view(*meaning) : text);
      kind = raw[Column::kind].text;
    } else {
      const std::string_view instrument_name = item_slot ? cell(*item_slot) : raw[Column::item].text;
      const bool fits = check_pattern && instrument_name.size() <= kMostTextBytes &&
                        RE2::PartialMatch(view(instrument_name), *check_pattern);
      if (fits) kind = "check";
      raw.fields[at(Column::kind)] = {kind, 0};
    }
    return kind != "check" || items.empty() || !item_slot || known_standard();
  }

  /// A check of something that no name stands for: says the instrument's own names too.
  bool known_standard() {
    const std::string_view name = raw[Column::item].text;
    std::vector<std::string_view> ids;
    for (const StandardIndex standard : context.standards) {
      ids.emplace_back(context.settings.of(standard).id);
      if (ids.back() == name) return true;
    }
    return translated(items, cell(*item_slot)) != nullptr ||  // then row_maker says what is wrong with it
           refuse_unknown(*item_slot, cell(*item_slot), items, std::move(ids));
  }

  bool refuse_unknown(std::size_t slot, std::string_view text, const Names& names,
                      std::vector<std::string_view> known) {
    for (const auto& [name, meaning] : names) known.emplace_back(name);
    std::sort(known.begin(), known.end());
    return refuse(slot, columns[slot],
                  (text.empty() ? "empty; " : in_quotes(text) + " is not known; ") + known_hint(text, known));
  }

  bool measurand() {
    if (!measurand_slot) return true;
    const std::string_view text = cell(*measurand_slot);
    const std::string* name = translated(measurands, text);
    if (name == nullptr && !measurands.empty() && !text.empty() && !is_measurand(text)) {
      std::vector<std::string_view> ids;
      for (const Measurand& known : context.settings.measurands) ids.emplace_back(known.id);
      return refuse_unknown(*measurand_slot, text, measurands, std::move(ids));
    }
    set(Column::measurand, *measurand_slot, name != nullptr ? std::string_view(*name) : text);
    return true;
  }

  [[nodiscard]] bool is_measurand(std::string_view id) const {
    return std::any_of(context.settings.measurands.begin(), context.settings.measurands.end(),
                       [id](const Measurand& known) { return known.id == id; });
  }

  void others() {
    for (const FieldSlot& field : fields) set(field.column, field.slot, cell(field.slot));
    raw.others.clear();
    for (const std::size_t slot : notes)
      raw.others.push_back({columns[slot], cell(slot), cells[slot].column});
  }

  [[nodiscard]] bool has_value(std::size_t slot) const {
    const std::string_view text = cell(slot);
    return !text.empty() &&
           std::find(format.no_value.begin(), format.no_value.end(), text) == format.no_value.end();
  }

  void set_result(const ResultSlot& result, std::string& room) {
    const ResultStyle& style = cells[result.slot].number ? result.json_style : result.style;
    set(result.column, result.slot,
        has_value(result.slot) ? style.plain(cell(result.slot), room) : std::string_view{});
    own.names[at(result.column)] = columns[result.slot];
  }

  void single_result() {
    std::size_t room = 0;
    for (const ResultSlot& result : results) set_result(result, rooms.at(room++));
    if (format.value && !format.factors.empty()) multiply_by_measurand();
    maker.make(raw, taker);
  }

  /// The factor that one measurand alone has, beside that of the column.
  void multiply_by_measurand() {
    const auto factor = format.factors.find(std::string(raw[Column::measurand].text));
    const std::string_view number = raw[Column::value].text;
    if (factor == format.factors.end() || number.empty()) return;
    rooms[1].assign(number);
    raw.fields[at(Column::value)].text = ResultStyle('.', "", factor->second).plain(rooms[1], rooms[0]);
  }

  void wide_results() {
    const bool any = std::any_of(results.begin(), results.end(),
                                 [this](const ResultSlot& result) { return has_value(result.slot); });
    const std::string_view kind = raw[Column::kind].text;
    if (kind == "intervention") return intervention();
    if (!any && kind != "void") {
      refuse(results[0].slot, columns[results[0].slot],
             results.size() == 1 ? "empty; a result like " + result_example + " was expected"
                                 : "empty, like the other results of this row; at least one was expected");
      return;
    }
    for (const ResultSlot& result : results) {
      if (any && !has_value(result.slot)) continue;
      raw.fields[at(Column::measurand)] = {result.measurand, 0};
      set_result(result, rooms[0]);
      Watched watched(taker);
      maker.make(raw, watched);
      const bool common_fault = watched.bad_column && *watched.bad_column != cells[result.slot].column;
      if (common_fault) return;
    }
  }

  /// Of all measurands, unless it says otherwise; it has no results.
  void intervention() {
    raw.fields[at(Column::measurand)] = {};
    raw.fields[at(Column::value)] = {};
    for (const ResultSlot& result : results)
      if (has_value(result.slot)) set_result(result, rooms[0]);  // row_maker refuses it
    maker.make(raw, taker);
  }
};

RowMapper::RowMapper(const MappedFormat& format, const PlainContext& context, const RowMaker& maker,
                     RowTaker& taker)
    : impl_(new Impl{format, context, maker, taker}) {
  impl_->learn();
}

RowMapper::~RowMapper() = default;

const std::vector<std::string>& RowMapper::columns() const {
  return impl_->columns;
}

void RowMapper::map(std::uint32_t line, std::string_view whole, std::span<const SourceCell> cells) {
  impl_->raw.line = line;
  impl_->raw.whole = whole;
  impl_->cells = cells;
  impl_->map();
}

}  // namespace agreed
