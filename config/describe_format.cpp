#include "config/describe_format.hpp"

#include "config/describe_line.hpp"
#include "config/mapped_format.hpp"
#include "config/value_text.hpp"

namespace agreed {
namespace {
using settings_file::shown;

std::string syntax_text(const MappedFormat& format) {
  if (format.syntax == ExportSyntax::json_array) return "one JSON array";
  if (format.syntax == ExportSyntax::json_lines) return "JSON lines";
  std::string text = format.delimiter == '\t' ? "tab" : shown(std::string(1, format.delimiter));
  text = "delimited by " + text + (format.header ? ", header row" : ", no header row");
  if (format.skip_lines > 0)
    text += ", skips " + std::to_string(format.skip_lines) + (format.skip_lines == 1 ? " line" : " lines");
  return text;
}

std::string numbers_text(const MappedFormat& format) {
  std::string text = "decimal " + shown(std::string(1, format.decimal));
  if (!format.thousands.empty()) text += ", thousands " + shown(format.thousands);
  return text;
}

std::string files_text(const MappedFormat& format) {
  std::string text = shown(format.files.take);
  if (!format.files.ignore.empty()) text += ", but not " + list_of(format.files.ignore);
  return text + (format.mode == FileMode::growing ? ", growing" : ", whole");
}

std::string time_text(const MappedTime& time) {
  std::string text =
      list_of(time.columns) + " as " + (time.pattern.empty() ? "RFC 3339" : shown(time.pattern));
  return time.zone ? text + ", zone " + *time.zone : text;
}

std::string kind_text(const MappedKind& kind) {
  if (kind.column) return "column " + *kind.column + translated(kind.words);
  if (kind.check_pattern)
    return "check where the item matches " + shown(*kind.check_pattern) + ", else " + kind.otherwise;
  return kind.otherwise;
}

std::string result_text(const ResultColumn& result) {
  constexpr double kNone = 1;
  return result.factor < kNone || result.factor > kNone ? result.column + " x " + shown(result.factor)
                                                        : result.column;
}

std::string results_text(const MappedFormat& format) {
  std::vector<std::string> words;
  if (format.value) words.push_back(result_text(*format.value));
  if (format.x) words.push_back("x = " + result_text(*format.x));
  if (format.y) words.push_back("y = " + result_text(*format.y));
  for (const MeasurandColumn& each : format.values)
    words.push_back(each.measurand + " = " + result_text(each.result));
  for (const auto& [measurand, factor] : format.factors) words.push_back(measurand + " x " + shown(factor));
  return list_of(words);
}
}  // namespace

std::string describe_format(const MappedFormat& format, const std::string& used_by) {
  std::string text = line(format.id, "of " + used_by);
  text += line("  syntax", syntax_text(format));
  text += line("  encoding, numbers", format.encoding + ", " + numbers_text(format));
  text += line("  files", files_text(format));
  text += line("  time", time_text(format.time));
  if (format.item) text += line("  item", *format.item + translated(format.items));
  text += line("  kind", kind_text(format.kind));
  if (format.measurand) text += line("  measurand", *format.measurand + translated(format.measurands));
  text += line("  results", results_text(format));
  if (!format.no_value.empty()) text += line("  no_value", list_of(format.no_value));
  if (!format.columns.empty()) text += line("  columns", pairs_of(format.columns));
  if (!format.constants.empty()) text += line("  constants", pairs_of(format.constants));
  if (!format.notes.empty()) text += line("  notes", list_of(format.notes));
  if (format.skip_rows)
    text += line("  skip_rows",
                 "where " + format.skip_rows->column + " matches " + shown(format.skip_rows->pattern));
  return text;
}

}  // namespace agreed
