#include "daemon/intake/row_maker.hpp"

#include <algorithm>
#include <optional>

#include "core/base/rfc3339.hpp"
#include "daemon/intake/nearest_known.hpp"
#include "daemon/intake/result_text.hpp"
#include "daemon/intake/text.hpp"
#include "daemon/printable.hpp"

namespace agreed {
namespace {

using Column = PlainColumn;
constexpr Duration kClockTolerance = std::chrono::minutes(5);
constexpr std::array<std::string_view, 4> kKinds = {"check", "split", "intervention", "void"};
constexpr std::array<std::string_view, 5> kInterventions = {"recalibrated", "repaired", "consumable_changed",
                                                            "level_accepted", "noted"};

template <class Thing>
std::vector<std::string_view> ids_of(const std::vector<Thing>& things) {
  std::vector<std::string_view> ids;
  ids.reserve(things.size());
  for (const Thing& thing : things) ids.emplace_back(thing.id);
  return ids;
}

/// Position of `id` in a list sorted by id.
template <class Thing>
std::optional<std::uint32_t> position_of(const std::vector<Thing>& things, std::string_view id) {
  const auto found =
      std::lower_bound(things.begin(), things.end(), id,
                       [](const Thing& thing, std::string_view name) { return thing.id < name; });
  if (found == things.end() || found->id != id) return std::nullopt;
  return static_cast<std::uint32_t>(found - things.begin());
}

template <std::size_t N>
std::optional<std::size_t> position_of(const std::array<std::string_view, N>& names, std::string_view name) {
  const auto found = std::find(names.begin(), names.end(), name);
  if (found == names.end()) return std::nullopt;
  return static_cast<std::size_t>(found - names.begin());
}

/// Works one row out. Each step returns false after it has said in `problem_` what is wrong.
class Work {
 public:
  Work(const PlainContext& context, const RawRow& raw) : context_(context), raw_(raw) {}

  void run(RowTaker& taker) {
    row_.line = raw_.line;
    row_.analyzer = context_.analyzer;
    if (!(kind() && analyzer() && time() && replicate() && words() && measurand() && by_kind())) {
      taker.bad(bad_row(raw_.line, problem_column_, raw_.whole, std::move(problem_)));
      return;
    }
    if (comparison_ == nullptr) {
      taker.good(std::move(row_));
      return;
    }
    Row y = row_;
    row_.analyzer = comparison_->x;
    y.analyzer = comparison_->y;
    set(row_, x_);
    set(y, y_);
    taker.good(std::move(row_));
    taker.good(std::move(y));
  }

 private:
  [[nodiscard]] std::string_view text(Column column) const { return raw_[column].text; }
  /// The field as the file has it, for messages.
  [[nodiscard]] std::string quoted(Column column) const { return in_quotes(raw_.written(column)); }

  bool refuse(Column column, std::string reason) {
    problem_column_ = raw_[column].column;
    problem_ = printable(raw_.name(column)) + ": " + std::move(reason);
    return false;
  }

  bool refuse_name(Column column, const std::vector<std::string_view>& known) {
    return refuse(column, (text(column).empty() ? "empty; " : quoted(column) + " is not known; ") +
                              known_hint(text(column), known));
  }

  bool kind() {
    const auto found = position_of(kKinds, text(Column::kind));
    if (!found) return refuse_name(Column::kind, {kKinds.begin(), kKinds.end()});
    row_.kind = static_cast<RowKind>(*found);
    return true;
  }

  bool analyzer() {
    const std::string_view name = text(Column::analyzer);
    const std::string& own = context_.settings.of(context_.analyzer).id;
    return name.empty() || name == own ||
           refuse(Column::analyzer, in_quotes(name) + " in the folder of \"" + own + "\"; \"" + own +
                                        "\" or nothing was expected");
  }

  bool time() {
    const std::string_view written = raw_.written(Column::measured_at);
    const auto parsed = raw_.own != nullptr ? std::optional(raw_.own->time) : parse_rfc3339(written);
    if (!parsed)
      return refuse(Column::measured_at,
                    in_quotes(written) + " is no time; one like 2026-01-05T06:00:00Z was expected");
    row_.measured_at = parsed->at;
    if (!parsed->offset_given && !local_time(written)) return false;
    if (row_.measured_at > context_.now + kClockTolerance)
      return refuse(Column::measured_at, in_quotes(written) + " is more than 5 min in the future (it is " +
                                             to_rfc3339(context_.now) + " now)");
    if (row_.measured_at < context_.not_before)
      return refuse(Column::measured_at,
                    in_quotes(written) + " is before not_before (" + to_rfc3339(context_.not_before) + ")");
    return true;
  }

  bool local_time(std::string_view written) {
    const LocalReading local = context_.zone->read(row_.measured_at);
    if (local.outcome == LocalOutcome::missing)
      return refuse(Column::measured_at, in_quotes(written) + " does not exist in " + context_.zone->name() +
                                             ": the clock was put forward over it");
    if (local.outcome == LocalOutcome::too_late)
      return refuse(Column::measured_at, in_quotes(written) + " is after 2037; such a time needs its offset");
    row_.measured_at = local.at;
    row_.clock_ambiguous = local.outcome == LocalOutcome::ambiguous;
    return true;
  }

  bool replicate() {
    const std::string_view written = text(Column::replicate);
    if (written.empty()) return true;
    const auto number = parse_replicate(written);
    if (!number)
      return refuse(Column::replicate,
                    in_quotes(written) + " is no replicate number; an integer from 0 was expected");
    row_.replicate = *number;
    return true;
  }

  /// Item, note and operator, and what goes into the note from other columns.
  bool words() {
    for (const Column column : {Column::item, Column::note, Column::by}) {
      if (const std::string fault = text_fault(text(column)); !fault.empty()) return refuse(column, fault);
    }
    if (text(Column::item).empty())
      return refuse(Column::item, "empty; what was measured or done was expected");
    row_.item = text(Column::item);
    row_.by = text(Column::by);
    row_.note = text(Column::note);
    for (const OtherField& other : raw_.others) {
      const std::string fault = text_fault(other.text);
      if (!fault.empty()) {
        problem_column_ = other.column;
        problem_ = printable(other.name) + ": " + fault;
        return false;
      }
      add_to_note(other.name, other.text);
    }
    if (row_.kind != RowKind::intervention && text(Column::standard) != text(Column::item)) {
      if (const std::string fault = text_fault(text(Column::standard)); !fault.empty())
        return refuse(Column::standard, fault);
      add_to_note(name_of(Column::standard), text(Column::standard));
    }
    return true;
  }

  static std::string text_fault(std::string_view written) {
    if (written.size() > kMostTextBytes)
      return std::to_string(written.size()) + " bytes long; at most " + std::to_string(kMostTextBytes) +
             " were expected";
    if (!is_clean_text(written)) return in_quotes(written) + " is not UTF-8 text without control characters";
    return {};
  }

  void add_to_note(std::string_view name, std::string_view written) {
    if (written.empty()) return;
    if (!row_.note.empty()) row_.note += "; ";
    row_.note.append(name).append("=").append(written);
  }

  bool measurand() {
    const std::string_view name = text(Column::measurand);
    const bool may_lack = row_.kind == RowKind::intervention || has_sides();
    if (name.empty() && may_lack) return true;
    const auto found = position_of(context_.settings.measurands, name);
    if (!found) return refuse_name(Column::measurand, ids_of(context_.settings.measurands));
    row_.measurand = MeasurandIndex{*found};
    return true;
  }

  bool by_kind() {
    if (row_.kind != RowKind::split && has_sides()) {
      for (const Column side : {Column::x, Column::y, Column::comparison})
        if (!text(side).empty())
          return refuse(side, quoted(side) + " given; only a split row has both sides");
    }
    switch (row_.kind) {
      case RowKind::check:
        return check();
      case RowKind::split:
        return has_sides() ? sides() : result(Column::value, row_);
      case RowKind::intervention:
        return intervention();
      case RowKind::void_:
        return text(Column::value).empty() || result(Column::value, row_);
    }
    return false;
  }

  bool check() {
    row_.standard = standard_named(row_.item);
    return row_.standard ? result(Column::value, row_) : refuse_standard(Column::item);
  }

  [[nodiscard]] std::optional<StandardIndex> standard_named(std::string_view id) const {
    for (const StandardIndex standard : context_.standards)
      if (context_.settings.of(standard).id == id) return standard;
    return std::nullopt;
  }

  bool refuse_standard(Column column) {
    std::vector<std::string_view> known;
    for (const StandardIndex standard : context_.standards)
      known.emplace_back(context_.settings.of(standard).id);
    return refuse(column, quoted(column) + " is no check standard of \"" +
                              context_.settings.of(context_.analyzer).id + "\"; " +
                              known_hint(text(column), known));
  }

  bool intervention() {
    const auto found = position_of(kInterventions, row_.item);
    if (!found) return refuse_name(Column::item, {kInterventions.begin(), kInterventions.end()});
    row_.intervention = static_cast<InterventionKind>(*found);
    if (!text(Column::value).empty())
      return refuse(Column::value, quoted(Column::value) + " given; an intervention has no value");
    if (text(Column::standard).empty()) return true;
    row_.standard = standard_named(text(Column::standard));
    return row_.standard.has_value() || refuse_standard(Column::standard);
  }

  [[nodiscard]] bool has_sides() const {
    return !text(Column::x).empty() || !text(Column::y).empty() || !text(Column::comparison).empty();
  }

  /// A split row with x, y and comparison.
  bool sides() {
    if (!text(Column::value).empty())
      return refuse(Column::value, "given together with x, y or comparison; one or the other was expected");
    const auto found = position_of(context_.settings.comparisons, text(Column::comparison));
    if (!found) return refuse_name(Column::comparison, ids_of(context_.settings.comparisons));
    const ComparisonSettings& comparison = context_.settings.comparisons[*found];
    if (row_.measurand && *row_.measurand != comparison.measurand)
      return refuse(Column::measurand, quoted(Column::measurand) + " given; comparison \"" + comparison.id +
                                           "\" is about \"" + context_.settings.of(comparison.measurand).id +
                                           "\"");
    row_.measurand = comparison.measurand;
    comparison_ = &comparison;
    return result(Column::x, x_) && result(Column::y, y_);
  }

  bool result(Column column, Row& row) {
    ResultText read;
    if (!result(column, read)) return false;
    set(row, read);
    return true;
  }

  bool result(Column column, ResultText& into) {
    const std::string_view written = text(column);
    const auto read = parse_result(written);
    if (read) {
      into = *read;
      return true;
    }
    const std::string example(raw_.own != nullptr ? raw_.own->result_example : "12.34, <0.05 or >20");
    if (written.empty()) return refuse(column, "empty; a result like " + example + " was expected");
    const bool comma = raw_.own == nullptr && written.find(',') != std::string_view::npos;
    return refuse(column, quoted(column) + " is no result; a decimal number like " + example +
                              " was expected" + (comma ? " (the decimal sign is \".\")" : ""));
  }

  static void set(Row& row, const ResultText& result) {
    row.value = result.value;
    row.censored = result.censored;
  }

  const PlainContext& context_;
  const RawRow& raw_;
  Row row_;
  const ComparisonSettings* comparison_ = nullptr;  ///< of a row with both sides
  ResultText x_, y_;
  std::uint32_t problem_column_ = 0;
  std::string problem_;
};

}  // namespace

std::vector<StandardIndex> standards_of(const Settings& settings, AnalyzerIndex analyzer) {
  std::vector<StandardIndex> standards;
  for (const ChartSettings& chart : settings.charts)
    if (chart.analyzer == analyzer) standards.push_back(chart.standard);
  std::sort(standards.begin(), standards.end());
  standards.erase(std::unique(standards.begin(), standards.end()), standards.end());
  return standards;
}

void RowMaker::make(const RawRow& raw, RowTaker& taker) const {
  Work(context_, raw).run(taker);
}

}  // namespace agreed
