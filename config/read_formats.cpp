// The mapped formats: what must be there, what does not go together, and what nobody knows.
#include <algorithm>
#include <array>
#include <memory>
#include <utility>

#include <re2/re2.h>

#include "config/parts.hpp"
#include "config/value_text.hpp"
#include "core/base/ascii.hpp"
#include "core/base/time_pattern.hpp"

namespace agreed::settings_file {
namespace {

constexpr std::array<const char*, 4> kKinds = {"check", "split", "intervention", "void"};

/// The names that a format may refer to.
struct Known {
  std::vector<std::string> measurands, standards, comparisons;
};

bool is_among(const std::vector<std::string>& names, const std::string& name) {
  return std::find(names.begin(), names.end(), name) != names.end();
}

// ---- How the file is built ----

char delimiter_of(const Section& format) {
  const std::string text = format.text("delimiter").value_or(",");
  if (text == "tab") return '\t';
  const bool fits = text.size() == 1 && !ascii::is_letter_or_digit(text[0]) && text[0] != '"' &&
                    static_cast<unsigned char>(text[0]) < 0x80;
  if (!fits)
    format.error("delimiter",
                 "found " + shown(text) +
                     ", expected one character that is no letter, digit or quotation mark, or tab");
  return fits ? text[0] : ',';
}

void read_numbers(const Section& format, MappedFormat& into) {
  const std::string decimal = format.text("decimal").value_or(".");
  if (decimal != "." && decimal != ",")
    format.error("decimal", "found " + shown(decimal) + ", expected \".\" or \",\"");
  into.decimal = decimal[0];
  if (!format.usable("thousands")) return;
  into.thousands = *format.text("thousands");
  const std::vector<std::string> known = {".", ",", "'", " ", "_"};
  if (!is_among(known, into.thousands))
    format.error("thousands",
                 "found " + shown(into.thousands) + R"(, expected one of "." "," "'" "_" or " " (a space))");
  else if (into.thousands == decimal)
    format.error("thousands",
                 "found " + shown(into.thousands) + ", which is the decimal sign; expected another, or none");
}

void read_syntax(const Section& format, MappedFormat& into) {
  const std::string type = format.text("type").value_or("csv");
  into.syntax = type == "csv"     ? ExportSyntax::csv
                : type == "jsonl" ? ExportSyntax::json_lines
                                  : ExportSyntax::json_array;
  into.delimiter = delimiter_of(format);
  read_numbers(format, into);
  into.encoding = format.text("encoding").value_or(into.encoding);
  into.skip_lines = format.whole_number("skip_lines").value_or(0);
  into.header = format.flag("header");
  into.mode = format.text("mode") == "growing" ? FileMode::growing : FileMode::whole;
  if (into.syntax == ExportSyntax::csv) return;
  for (const char* key : {"delimiter", "skip_lines", "header"})
    if (format.given(key)) format.warning(key, "has no effect with type " + type);
  into.header = true;
  if (into.mode == FileMode::growing && into.syntax == ExportSyntax::json_array)
    format.error("mode", "found 'growing' with type json, expected whole: an array cannot be appended to");
}

void read_names(const Section& format, MappedFormat& into) {
  into.files.take = format.text("files").value_or("*");
  into.files.ignore = format.words("ignore");
}

// ---- What the columns mean ----

/// `number` of a headerless file.
void check_column(const Section& section, const char* key, const MappedFormat& format) {
  if (format.header || !section.usable(key)) return;
  const auto number = whole_number_of(*section.text(key));
  if (!number || *number < 1 || *number > 1'000)
    section.error(key, "found " + shown(*section.text(key)) +
                           ", expected the number of a column, 1 to 1000: the file has no header");
}

std::optional<std::string> column_of(const Section& section, const char* key, const MappedFormat& format) {
  check_column(section, key, format);
  return section.text(key);
}

void check_columns(const Section& section, const char* key, const MappedFormat& format) {
  const auto words = section.words(key);
  for (std::size_t i = 0; i < words.size() && !format.header; ++i)
    if (!words[i].empty() && !whole_number_of(words[i]))
      section.error(key, i,
                    "found " + shown(words[i]) + ", expected the number of a column: the file has no header");
}

void check_pattern(const Section& section, const char* key) {
  if (!section.usable(key)) return;
  RE2::Options quiet;
  quiet.set_log_errors(false);
  const RE2 pattern(*section.text(key), quiet);
  if (!pattern.ok())
    section.error(key, "found " + shown(*section.text(key)) +
                           ", expected a pattern such as \"^CS-\": " + pattern.error());
}

void read_time(const Section& format, MappedFormat& into) {
  const Section time = format.section("time");
  if (!time.exists()) return;
  if (time.given("column") == time.given("columns"))
    time.error_here(time.given("column") ? "found column and columns, expected one of the two"
                                         : "found no column, expected column, or columns: [date, time]");
  if (const auto column = column_of(time, "column", into)) into.time.columns = {*column};
  check_columns(time, "columns", into);
  const auto columns = time.words("columns");
  if (time.given("columns") && columns.size() != 2)
    time.error("columns", "found " + std::to_string(columns.size()) + ", expected two: date and time");
  else if (!columns.empty())
    into.time.columns = columns;
  into.time.zone = time.usable("zone") ? time.text("zone") : std::nullopt;
  into.time.pattern = time.text("pattern").value_or("");
  if (into.time.pattern.empty()) return;
  const std::string fault = TimePattern::fault_of(into.time.pattern);
  if (!fault.empty())
    time.error("pattern", "found " + shown(into.time.pattern) +
                              ", expected a pattern such as \"%d.%m.%Y %H:%M:%S\": " + fault);
  else if (into.time.zone && TimePattern(into.time.pattern).has_offset())
    time.warning("zone", "has no effect: the pattern reads the offset");
}

void read_item(const Section& format, const Known& known, MappedFormat& into) {
  into.item = column_of(format.section("item"), "column", into);
  if (!format.given("item") && !into.constants.contains("item"))
    format.error_here("found no item, expected the column that says what was measured: item: {column: ...}");
  into.items = format.texts("items");
  for (const auto& [instrument, name] : into.items) {
    const auto meant = is_among(known.standards, name) ? std::nullopt : nearest(name, known.standards);
    if (meant)
      format.warning("items", instrument,
                     "found " + shown(name) + ", which is no check standard; did you mean " + *meant + "?");
  }
}

void read_kind(const Section& format, MappedFormat& into) {
  const Section kind = format.section("kind");
  check_pattern(kind, "check_when_item_matches");
  into.kind.check_pattern = kind.text("check_when_item_matches");
  into.kind.otherwise = kind.text("otherwise").value_or("split");
  into.kind.column = column_of(kind, "column", into);
  into.kind.words = kind.texts("words");
  const std::vector<std::string> kinds(kKinds.begin(), kKinds.end());
  for (const auto& [word, meaning] : into.kind.words)
    if (!is_among(kinds, meaning)) kind.error("words", word, not_one_of(meaning, kinds));
  if (into.kind.column && (kind.given("check_when_item_matches") || kind.given("otherwise")))
    kind.error("column", "found beside check_when_item_matches or otherwise, expected the one or the others");
  if (!into.kind.column && kind.given("words"))
    kind.error("words", "found without column, expected the column that these words stand in");
}

std::optional<ResultColumn> result_of(const Section& format, const char* key, const MappedFormat& into) {
  const Section section = format.section(key);
  const auto column = column_of(section, "column", into);
  if (!column) return std::nullopt;
  return ResultColumn{*column, section.number("factor").value_or(1)};
}

void read_values(const Section& format, const Known& known, MappedFormat& into) {
  const auto short_forms = format.texts("values");
  for (const Section& section : format.named("values")) {
    if (!is_among(known.measurands, section.id())) {
      section.error_here("unknown measurand; " + not_one_of(section.id(), known.measurands));
      continue;
    }
    const auto short_form = short_forms.find(section.id());
    const auto column = short_form != short_forms.end() ? std::optional(short_form->second)
                                                        : column_of(section, "column", into);
    const double factor = section.number("factor").value_or(1);
    if (column)
      into.values.push_back({section.id(), {*column, factor}});
    else if (format.given("value"))
      into.factors.emplace(section.id(), factor);
    else
      section.error_here("found no column, expected the column of its results");
    if (column && format.given("value"))
      section.error_here("found a column beside value, expected the one or the other");
  }
}

void check_shape(const Section& format, const MappedFormat& into) {
  const bool pairs = format.given("x") || format.given("y");
  const int shapes = (into.values.empty() ? 0 : 1) + (format.given("value") ? 1 : 0) + (pairs ? 1 : 0);
  if (shapes == 0 && !format.given("values"))
    format.error_here(
        "found no results, expected values (a column for each measurand), or value, or x and y");
  if (shapes > 1 && (pairs || into.values.empty()))
    format.error_here("found x or y beside value or values, expected the one or the other");
  if (pairs && (!format.given("x") || !format.given("y")))
    format.error_here("found one side of a pair, expected x and y");
  if (pairs && !into.columns.contains("comparison") && !into.constants.contains("comparison"))
    format.error_here(
        "found x and y without their comparison, expected columns.comparison or "
        "constants.comparison");
  const bool names_measurand = format.given("measurand") || into.constants.contains("measurand");
  if (format.given("value") && !names_measurand)
    format.error_here(
        "found value without its measurand, expected measurand: {column: ...} or "
        "constants.measurand");
  if (names_measurand && !into.values.empty())
    format.error_here("found a measurand beside values, which name theirs; expected the one or the other");
}

void read_results(const Section& format, const Known& known, MappedFormat& into) {
  const Section measurand = format.section("measurand");
  into.measurand = column_of(measurand, "column", into);
  into.measurands = measurand.texts("names");
  for (const auto& [instrument, name] : into.measurands)
    if (!is_among(known.measurands, name))
      measurand.error("names", instrument, not_one_of(name, known.measurands));
  into.value = result_of(format, "value", into);
  into.x = result_of(format, "x", into);
  into.y = result_of(format, "y", into);
  read_values(format, known, into);
  into.no_value = format.words("no_value");
}

void read_others(const Section& format, const Known& known, MappedFormat& into) {
  const Section columns = format.section("columns"), constants = format.section("constants");
  for (const char* name : {"replicate", "operator", "note", "analyzer", "standard", "comparison"})
    if (const auto column = column_of(columns, name, into)) into.columns.emplace(name, *column);
  for (const char* name : {"measurand", "comparison", "item", "replicate", "operator", "note"}) {
    const auto text = constants.text(name);
    if (!text) continue;
    into.constants.emplace(name, *text);
    const bool is_own_section = name == std::string("item") || name == std::string("measurand");
    const bool column_too = into.columns.contains(name) || (is_own_section && format.given(name));
    if (column_too) constants.error(name, "found beside its column, expected the one or the other");
  }
  for (const auto& [key, names] :
       {std::pair{"measurand", known.measurands}, {"comparison", known.comparisons}})
    if (into.constants.contains(key) && !is_among(names, into.constants[key]))
      constants.error(key, not_one_of(into.constants[key], names));
  check_columns(format, "notes", into);
  into.notes = format.words("notes");
  const Section skip = format.section("skip_rows");
  check_pattern(skip, "matches");
  const auto column = column_of(skip, "column", into);
  const auto matches = skip.text("matches");
  if (column && matches) into.skip_rows = SkippedRows{*column, *matches};
}

MappedFormat format_of(const Section& format, const Known& known) {
  MappedFormat into;
  into.id = format.id();
  if (into.id == "plain") format.error_here("found the name of the built-in format, expected another");
  read_syntax(format, into);
  read_names(format, into);
  read_others(format, known, into);
  read_time(format, into);
  read_item(format, known, into);
  read_kind(format, into);
  read_results(format, known, into);
  check_shape(format, into);
  return into;
}

}  // namespace

void read_formats(const Section& top, Draft& draft) {
  const Known known{ids_of(draft.settings.measurands), ids_of(draft.settings.standards),
                    ids_of(draft.settings.comparisons)};
  for (const Section& section : top.named("formats")) {
    const auto format = std::make_shared<const MappedFormat>(format_of(section, known));
    for (IntakeSettings& intake : draft.config.intake)
      if (intake.format == format->id) intake.mapped = format;
  }
}

}  // namespace agreed::settings_file
