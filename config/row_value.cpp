#include "config/row_value.hpp"

#include <algorithm>
#include <vector>

#include "config/nearest.hpp"
#include "config/time_zone.hpp"
#include "config/url.hpp"
#include "config/utf8.hpp"
#include "config/value_text.hpp"

namespace agreed::settings_file {
namespace {

constexpr std::size_t kLongestText = 200, kLongestPath = 1'024;
constexpr const char* kIdRule =
    "an id: letters, digits, _ and -, beginning with a letter or digit, at most 64";

bool is_day_time(std::string_view text) {
  return text == "24:00" ||
         (text.size() == 5 && time_of("2000-01-01T" + std::string(text) + ":00Z").has_value());
}

std::string range_words(const SettingRow& row, const std::string& least, const std::string& most) {
  constexpr double kNoUpperEnd = 1e299;
  if (!row.has_range()) return "";
  const std::string low = (row.above_least ? " above " : " from ") + least;
  return row.most > kNoUpperEnd ? low + (row.above_least ? "" : " up") : low + " to " + most;
}

std::string expected_duration(const SettingRow& row) {
  const auto words = [](double ms) { return shown(Duration(static_cast<long long>(ms))); };
  const std::string range = range_words(row, words(row.least), words(row.most));
  const std::string none = row.type == Type::duration_or_none ? ", or none" : "";
  return "a duration such as 30s, 15min, 8h or 30d" + (range.empty() ? "" : "," + range) + none;
}

bool in_range(const SettingRow& row, double value) {
  if (!row.has_range()) return true;
  return (row.above_least ? value > row.least : value >= row.least) && value <= row.most;
}

bool one_line(std::string_view text, std::size_t longest) {
  return !text.empty() && text.size() <= longest && !first_control(text) &&
         text.find_first_of("\t\r\n") == std::string_view::npos;
}

bool is_word(const SettingRow& row, std::string_view text) {
  const auto words = words_of(row.choices);
  return std::find(words.begin(), words.end(), text) != words.end();
}

bool is_variable(std::string_view text) {
  const auto allowed = [](char c) { return is_id(std::string_view(&c, 1)) || c == '_'; };
  return one_line(text, kLongestText) && !(text[0] >= '0' && text[0] <= '9') &&
         std::all_of(text.begin(), text.end(), allowed);
}

bool is_good_duration(const SettingRow& row, std::string_view text) {
  const auto duration = duration_of(text);
  return duration && in_range(row, static_cast<double>(duration->count()));
}

/// What people write most often instead of a number.
std::string hint(const SettingRow& row, std::string_view text) {
  const bool numeric =
      row.type == Type::number || row.type == Type::whole_number || row.type == Type::number_list;
  if (numeric && text.find(',') != std::string_view::npos) return "; the decimal sign is a point";
  if (numeric && text.size() > 1 && text[0] == '0' && text[1] != '.')
    return "; write it without zeros in front";
  const bool duration = row.type == Type::duration || row.type == Type::duration_or_none;
  if (duration && whole_number_of(text)) return "; the unit is missing";
  if (row.type == Type::text && text.size() > kLongestText) return "; is a quotation mark left open?";
  if (row.type == Type::zone) return did_you_mean(text, zone_names());
  if (!row.choices.empty()) return did_you_mean(text, words_of(row.choices));
  return "";
}

}  // namespace

std::string expected(const SettingRow& row) {
  const std::string numbers = range_words(row, shown(row.least), shown(row.most));
  switch (row.type) {
    case Type::section:
      return "a section";
    case Type::named:
      return "a section of ids";
    case Type::list:
      return "a list of sections";
    case Type::word_or_section:
      return "one of " + enumerated(words_of(row.choices)) + ", or a section";
    case Type::texts_or_sections:
      return "a section of ids, each with a text or a section";
    case Type::text_map:
      return "a section of texts, each with an id";
    case Type::text:
      return "a text of 1 to 200 bytes in one line";
    case Type::id:
      return kIdRule;
    case Type::word:
      return "one of " + enumerated(words_of(row.choices));
    case Type::flag:
      return "true or false";
    case Type::number:
      return "a number" + numbers;
    case Type::whole_number:
      return "a whole number" + numbers;
    case Type::duration:
    case Type::duration_or_none:
      return expected_duration(row);
    case Type::time:
      return "a time with its offset such as 2026-01-05T06:00:00Z, or a date";
    case Type::day_time:
      return "a time of day from \"00:00\" to \"24:00\"";
    case Type::zone:
      return "a time zone such as Europe/Dublin";
    case Type::path:
      return "a path of 1 to 1024 bytes";
    case Type::url:
      return "a URL such as https://chat.harrow.example/hooks/a1, without name and password";
    case Type::address:
      return "an address such as 127.0.0.1 or ::1";
    case Type::variable:
      return "the name of an environment variable such as AGREED_HOOK";
    case Type::id_list:
      return "a list of ids such as [line1, line2]";
    case Type::text_list:
      return "a list of texts of 1 to 200 bytes such as [Date, Time]";
    case Type::word_list:
      return "a list of " + enumerated(words_of(row.choices));
    case Type::number_list:
      return "a list of numbers such as [10.5, 13.0]";
  }
  return "another value";
}

/// One element of a list, as an expectation of its own.
std::string expected_element(const SettingRow& row) {
  if (row.type == Type::id_list || row.type == Type::text_map) return kIdRule;
  if (row.type == Type::word_list) return "one of " + enumerated(words_of(row.choices));
  if (row.type == Type::number_list) return "a number";
  if (row.type == Type::texts_or_sections) return "a text, or a section";
  if (row.type == Type::text_list) return "a text of 1 to 200 bytes in one line";
  return expected(row);
}

bool is_good(const SettingRow& row, std::string_view text) {
  switch (row.type) {
    case Type::texts_or_sections:
    case Type::text_list:
    case Type::text:
      return one_line(text, kLongestText);
    case Type::path:
      return one_line(text, kLongestPath);
    case Type::text_map:
    case Type::id_list:
    case Type::id:
      return is_id(text);
    case Type::word_or_section:
    case Type::word_list:
    case Type::word:
      return is_word(row, text);
    case Type::flag:
      return flag_of(text).has_value();
    case Type::number_list:
    case Type::number: {
      const auto value = number_of(text);
      return value && in_range(row, *value);
    }
    case Type::whole_number: {
      const auto value = whole_number_of(text);
      return value && in_range(row, static_cast<double>(*value));
    }
    case Type::duration_or_none:
      return text == "none" || is_good_duration(row, text);
    case Type::duration:
      return is_good_duration(row, text);
    case Type::time:
      return time_of(text).has_value();
    case Type::day_time:
      return is_day_time(text);
    case Type::zone:
      return is_zone(text);
    case Type::address:
      return is_listen_address(std::string(text));
    case Type::variable:
      return is_variable(text);
    case Type::url:
      return text.size() <= kLongestPath && url_parts(text).has_value();
    case Type::section:
    case Type::named:
    case Type::list:
      return false;
  }
  return false;
}

std::string expected_id() {
  return kIdRule;
}

std::optional<std::string> complaint(const SettingRow& row, std::string_view text) {
  if (is_good(row, text)) return std::nullopt;
  if (row.type == Type::url || row.type == Type::variable)
    return "found something else (not shown), expected " + expected(row);
  return "found " + shown(text) + ", expected " + expected(row) + hint(row, text);
}

std::optional<std::string> element_complaint(const SettingRow& row, std::string_view text) {
  if (is_good(row, text)) return std::nullopt;
  return "found " + shown(text) + ", expected " + expected_element(row) + hint(row, text);
}

}  // namespace agreed::settings_file
