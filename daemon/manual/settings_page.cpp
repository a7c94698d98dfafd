#include "daemon/manual/settings_page.hpp"

#include "config/row_value.hpp"
#include "config/schema.hpp"
#include "daemon/manual/roff.hpp"

namespace agreed::manual {
namespace {

using settings_file::SettingRow;
using settings_file::Type;

/// As people write it: "analyzers.ID.inbox", "alerts.routes[].name".
std::string shown_key(const SettingRow& row) {
  std::string key(row.key);
  for (std::size_t star = key.find('*'); star != std::string::npos; star = key.find('*'))
    key.replace(star, 1, "ID");
  return key;
}

std::string entry(const SettingRow& row) {
  std::string text(row.why);
  text += ". Form: " + settings_file::expected(row) + ".";
  if (!row.fallback.empty()) text += " Default: " + std::string(row.fallback) + ".";
  if (row.is_required) text += " Required.";
  if (!row.like.empty()) text += " Its keys are those of " + std::string(row.like) + ".";
  return ".TP\n" + bold(shown_key(row)) + '\n' + prose(text);
}

/// A section of its own on the page.
bool has_keys(const SettingRow& row) {
  return row.type == Type::section || row.type == Type::named || row.type == Type::list;
}

}  // namespace

std::string settings_page(std::string_view example, std::string_view date, std::string_view version) {
  std::string page = title("agreed.yaml", 5, date, "agreed " + std::string(version));
  page += section("NAME") + "agreed.yaml \\- configuration of agreed\n";
  page += section("DESCRIPTION") +
          prose(
              "One YAML file says what is measured, on which analyzers, what difference does no harm, and "
              "who is told. It "
              "may have any name. Relative paths start at the folder of the file. A key that is not listed "
              "here is an "
              "error, and the nearest right one is named; agreed check shows every error at once, with line "
              "and column, "
              "and the values in effect.") +
          ".PP\n" +
          prose(
              "ID stands for a name of your choice: letters, digits, _ and -, at most 64. [] stands for each "
              "element of a "
              "list. Durations are written 500ms, 30s, 15min, 8h or 30d, times as 2026-01-05T06:00:00Z.");
  page += section("THE SERVICE");
  for (const SettingRow* top : settings_file::rows_below(""))
    if (!has_keys(*top)) page += entry(*top);
  for (const SettingRow* top : settings_file::rows_below("")) {
    if (!has_keys(*top)) continue;
    page += section("KEYS OF " + std::string(top->key)) + entry(*top);
    const std::string below_dot = std::string(top->key) + '.', below_ids = std::string(top->key) + "[]";
    for (const SettingRow& row : settings_file::schema())
      if (row.key.starts_with(below_dot) || row.key.starts_with(below_ids)) page += entry(row);
  }
  page += section("EXAMPLE") + prose("A first configuration:") + typed(example);
  return page + section("SEE ALSO") + "\\fBagreed\\fP(1)\n";
}

}  // namespace agreed::manual
