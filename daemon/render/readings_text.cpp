#include "daemon/render/readings_text.hpp"

#include <algorithm>
#include <array>
#include <string_view>

#include "core/base/number_text.hpp"
#include "daemon/render/json_parts.hpp"

namespace agreed {
namespace {

const char* kind_of(const ReadingRow& row) {
  return row.kind == StoredKind::check ? "check" : "split";
}

const char* censoring_of(const ReadingRow& row) {
  if (row.censored == 0) return "";
  return row.censored < 0 ? "below" : "above";
}

std::string value_of(const ReadingRow& row) {
  std::string number = exact(row.value);
  if (row.censored == 0) return number;
  return (row.censored < 0 ? "<" : ">") + number;
}

Json reading_of(const ReadingRow& row) {
  return {{"kind", kind_of(row)},
          {"measured_at", to_rfc3339(row.measured_at)},
          {"analyzer", row.analyzer},
          {"measurand", row.measurand},
          {"item", row.item},
          {"replicate", row.replicate},
          {"value", json_number(row.value)},
          {"censored", json_words(censoring_of(row))},
          {"voided", row.voided},
          {"corrected", row.corrected},
          {"revision", row.revision},
          {"clock_ambiguous", row.clock_ambiguous},
          {"operator", json_words(row.by)},
          {"note", json_words(row.note)},
          {"file", std::to_string(row.file)},
          {"line", row.line},
          {"received_at", to_rfc3339(row.received_at)}};
}

bool is_plain_number(std::string_view text) {
  if (!text.empty() && (text.front() == '-' || text.front() == '+')) text.remove_prefix(1);
  const auto digits = [&text] {
    const auto end = std::min(text.find_first_not_of("0123456789"), text.size());
    text.remove_prefix(end);
    return end > 0;
  };
  bool any = digits();
  if (!text.empty() && text.front() == '.') {
    text.remove_prefix(1);
    any = digits() || any;
  }
  if (any && !text.empty() && (text.front() == 'e' || text.front() == 'E')) {
    text.remove_prefix(1);
    if (!text.empty() && (text.front() == '-' || text.front() == '+')) text.remove_prefix(1);
    any = digits();
  }
  return any && text.empty();
}

}  // namespace

std::string csv_cell(const std::string& text) {
  const bool computed =
      !text.empty() && std::string_view("=+-@").find(text.front()) != std::string_view::npos;
  std::string harmless = computed && !is_plain_number(text) ? "'" + text : text;
  if (harmless.find_first_of(",\"\r\n") == std::string::npos) return harmless;
  std::string quoted = "\"";
  for (const char c : harmless) quoted.append(c == '"' ? 2 : 1, c);
  return quoted + "\"";
}

std::string readings_json(const std::vector<ReadingRow>& readings, const std::optional<std::string>& next) {
  return json_page("readings", readings, reading_of, next);
}

std::string csv_line(std::span<const std::string> cells) {
  std::string line;
  for (const std::string& cell : cells) line.append(line.empty() ? "" : ",").append(csv_cell(cell));
  return line + "\r\n";
}

std::string readings_csv_head() {
  return "kind,measured_at,measurand,item,value,replicate,operator,note,analyzer,censored,voided,corrected,"
         "revision,clock_ambiguous,file,line,received_at\r\n";
}

std::string readings_csv_lines(const std::vector<ReadingRow>& readings) {
  std::string csv;
  const auto yes_no = [](bool yes) { return std::string(yes ? "true" : "false"); };
  for (const ReadingRow& row : readings)
    csv += csv_line(std::array{
        std::string(kind_of(row)), to_rfc3339(row.measured_at), row.measurand, row.item, value_of(row),
        std::to_string(row.replicate), row.by, row.note, row.analyzer, std::string(censoring_of(row)),
        yes_no(row.voided), yes_no(row.corrected), std::to_string(row.revision), yes_no(row.clock_ambiguous),
        std::to_string(row.file), std::to_string(row.line), to_rfc3339(row.received_at)});
  return csv;
}

std::string readings_csv(const std::vector<ReadingRow>& readings) {
  return readings_csv_head() + readings_csv_lines(readings);
}

}  // namespace agreed
