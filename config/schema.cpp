#include "config/schema.hpp"

#include <algorithm>
#include <map>
#include <utility>

namespace agreed::settings_file {

const std::vector<const SettingRow*>& rows_below(const std::string& pattern) {
  static const auto by_parent = [] {
    std::map<std::string, std::vector<const SettingRow*>> rows;
    for (const SettingRow& row : schema()) {
      const std::size_t dot = row.key.rfind('.');
      const bool at_top = dot == std::string_view::npos;
      rows[at_top ? "" : std::string(row.key.substr(0, dot))].push_back(&row);
    }
    return rows;
  }();
  static const std::vector<const SettingRow*> none;
  const auto found = by_parent.find(pattern);
  return found == by_parent.end() ? none : found->second;
}

std::string pattern_below(const SettingRow& row) {
  std::string pattern(row.like.empty() ? row.key : row.like);
  if (row.type == Type::named || row.type == Type::texts_or_sections) pattern += ".*";
  if (row.type == Type::list) pattern += "[]";
  return pattern;
}

const SettingRow* find_row(const std::string& pattern, std::string_view name) {
  const auto& rows = rows_below(pattern);
  const auto found =
      std::find_if(rows.begin(), rows.end(), [&](const SettingRow* row) { return name_of(*row) == name; });
  return found == rows.end() ? nullptr : *found;
}

std::string name_of(const SettingRow& row) {
  const std::size_t dot = row.key.rfind('.');
  return std::string(dot == std::string_view::npos ? row.key : row.key.substr(dot + 1));
}

std::vector<std::string> words_of(std::string_view choices) {
  std::vector<std::string> words;
  while (!choices.empty()) {
    const std::size_t bar = choices.find('|');
    words.emplace_back(choices.substr(0, bar));
    choices = bar == std::string_view::npos ? std::string_view{} : choices.substr(bar + 1);
  }
  return words;
}

}  // namespace agreed::settings_file
