#pragma once
// Every key of the configuration, one row each: name, type, default, range, reason. Validation, suggestions
// and typed reading go by these rows, and a test holds config/reference.yaml against them.
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace agreed::settings_file {

enum class Type {
  section,            ///< keys named by the rows below it
  named,              ///< sections under ids of the user's choice; rows below are KEY.*.NAME
  list,               ///< sections; rows below are KEY[].NAME
  word_or_section,    ///< one of `choices`, or a section
  texts_or_sections,  ///< under ids: each a text or a section
  text_map,           ///< text of the user's choice to id
  text,
  id,
  word,  ///< one of `choices`
  flag,
  number,
  whole_number,
  duration,
  duration_or_none,
  time,
  day_time,  ///< "22:00"; up to "24:00"
  zone,
  path,
  url,  ///< its value is never shown: the path of many a webhook is a secret
  address,
  variable,  ///< name of an environment variable; never shown either, in case it is the secret itself
  id_list,
  text_list,
  word_list,  ///< each one of `choices`
  number_list,
};

struct SettingRow {
  std::string_view key;  ///< "analyzers.*.inbox"; of a row `like` another the rows below are the other's
  Type type = Type::text;
  std::string_view fallback;  ///< default, as it would be written; empty: none
  std::string_view why;       ///< one line
  std::string_view choices;   ///< "whole|growing"
  std::string_view like;
  double least = 0, most = 0;  ///< of numbers, and of durations in milliseconds; both 0: any
  bool above_least = false;    ///< `least` itself is too little
  bool is_required = false;

  [[nodiscard]] constexpr SettingRow within(double low, double high) const {
    SettingRow row = *this;
    row.least = low;
    row.most = high;
    return row;
  }
  [[nodiscard]] constexpr SettingRow above(double low, double high) const {
    SettingRow row = within(low, high);
    row.above_least = true;
    return row;
  }
  [[nodiscard]] constexpr SettingRow one_of(std::string_view words) const {
    SettingRow row = *this;
    row.choices = words;
    return row;
  }
  [[nodiscard]] constexpr SettingRow as(std::string_view other) const {
    SettingRow row = *this;
    row.like = other;
    return row;
  }
  [[nodiscard]] constexpr SettingRow required() const {
    SettingRow row = *this;
    row.is_required = true;
    return row;
  }
  [[nodiscard]] bool has_range() const { return least < most; }
};

/// All rows, in the order of the reference file.
[[nodiscard]] const std::vector<SettingRow>& schema();

/// The rows directly below a section's pattern; "" = the top.
[[nodiscard]] const std::vector<const SettingRow*>& rows_below(const std::string& pattern);

/// The pattern under which the rows below a row (of its elements, for named and lists) are found.
[[nodiscard]] std::string pattern_below(const SettingRow& row);

/// The row NAME below a pattern; null when there is none.
[[nodiscard]] const SettingRow* find_row(const std::string& pattern, std::string_view name);

/// The last part of the row's key.
[[nodiscard]] std::string name_of(const SettingRow& row);

/// "a|b|c" to its words.
[[nodiscard]] std::vector<std::string> words_of(std::string_view choices);

}  // namespace agreed::settings_file
