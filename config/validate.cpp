#include "config/validate.hpp"

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
constexpr const char* kNotYet = "not available in this version yet";

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
    case Type::word_list:
      return "a list of " + enumerated(words_of(row.choices));
    case Type::number_list:
      return "a list of numbers such as [10.5, 13.0]";
  }
  return "another value";
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

bool is_good(const SettingRow& row, std::string_view text) {
  switch (row.type) {
    case Type::texts_or_sections:
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

/// One element of a list, as an expectation of its own.
std::string expected_element(const SettingRow& row) {
  if (row.type == Type::id_list || row.type == Type::text_map) return kIdRule;
  if (row.type == Type::word_list) return "one of " + enumerated(words_of(row.choices));
  if (row.type == Type::number_list) return "a number";
  if (row.type == Type::texts_or_sections) return "a text, or a section";
  return expected(row);
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

std::string kind_words(const Node& node) {
  switch (node.kind) {
    case NodeKind::empty:
      return "found no value";
    case NodeKind::list:
      return "found a list";
    case NodeKind::map:
      return "found a section";
    case NodeKind::scalar:
      break;
  }
  return "found " + shown(node.text);
}

class Validator {
 public:
  explicit Validator(Problems& problems) : problems_(problems) {}

  /// The keys of one section. `at`: where the section is named.
  void section(const Node& map, const std::string& pattern, const std::string& path, Position at) {
    for (const Node& child : map.children) {
      const SettingRow* row = find_row(pattern, child.key);
      if (row == nullptr) {
        unknown(child, pattern, path);
      } else {
        value(child, *row, joined(path, child.key));
      }
    }
    for (const SettingRow* row : rows_below(pattern))
      if (row->is_required && map.find(name_of(*row)) == nullptr)
        problems_.error(at, joined(path, name_of(*row)), "missing; expected " + expected(*row));
  }

 private:
  void unknown(const Node& child, const std::string& pattern, const std::string& path) {
    std::vector<std::string> names;
    for (const SettingRow* row : rows_below(pattern)) names.push_back(name_of(*row));
    std::string message = "unknown key";
    if (const auto meant = nearest(child.key, names)) {
      message += "; did you mean " + *meant + "?";
    } else if (const std::string home = section_that_knows(child.key); !home.empty()) {
      message += "; it belongs under " + home;
    } else {
      message += "; known here: " + enumerated(names);
    }
    problems_.error(child.key_at, joined(path, child.key), message);
  }

  /// Where a key that is right, but out of place, belongs.
  static std::string section_that_knows(const std::string& key) {
    for (const SettingRow& row : schema()) {
      if (name_of(row) != key) continue;
      const std::size_t dot = row.key.rfind('.');
      return dot == std::string_view::npos ? "the top of the file" : std::string(row.key.substr(0, dot));
    }
    return "";
  }

  void value(const Node& node, const SettingRow& row, const std::string& path) {
    not_yet(node, row, path);
    switch (row.type) {
      case Type::section:
        return fixed_section(node, row, path);
      case Type::named:
      case Type::texts_or_sections:
        return named(node, row, path);
      case Type::text_map:
        return text_map(node, row, path);
      case Type::list:
        return list(node, row, path);
      case Type::id_list:
      case Type::word_list:
      case Type::number_list:
        return scalar_list(node, row, path);
      case Type::word_or_section:
        return node.kind == NodeKind::map ? fixed_section(node, row, path) : scalar(node, row, path);
      default:
        return scalar(node, row, path);
    }
  }

  void not_yet(const Node& node, const SettingRow& row, const std::string& path) {
    if (row.later == Later::no) return;
    const auto words = words_of(row.later_choices);
    if (!words.empty()) {
      const bool concerned =
          node.kind == NodeKind::scalar && std::find(words.begin(), words.end(), node.text) != words.end();
      if (concerned) problems_.error(node.at, path, "found " + shown(node.text) + ", which is " + kNotYet);
    } else if (row.later == Later::refused) {
      problems_.error(node.key_at, path, kNotYet);
    } else {
      problems_.warning(node.key_at, path, std::string(kNotYet) + "; it has no effect");
    }
  }

  void wrong(const Node& node, const SettingRow& row, const std::string& path) {
    problems_.error(node.at, path, kind_words(node) + ", expected " + expected(row));
  }

  void fixed_section(const Node& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::map && node.kind != NodeKind::empty) return wrong(node, row, path);
    section(node, pattern_below(row), path, node.key_at);
  }

  void named(const Node& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::map && node.kind != NodeKind::empty) return wrong(node, row, path);
    if (row.is_required && node.children.empty())
      problems_.error(node.key_at, path, "found none, expected at least one");
    for (const Node& child : node.children) {
      const std::string child_path = joined(path, child.key);
      if (!is_id(child.key))
        problems_.error(child.key_at, child_path, "found " + shown(child.key) + ", expected " + kIdRule);
      if (row.type == Type::texts_or_sections && child.kind == NodeKind::scalar) {
        element(child, row, child_path);
      } else if (child.kind == NodeKind::map || child.kind == NodeKind::empty) {
        section(child, pattern_below(row), child_path, child.key_at);
      } else {
        problems_.error(child.at, child_path, kind_words(child) + ", expected a section");
      }
    }
  }

  void text_map(const Node& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::map && node.kind != NodeKind::empty) return wrong(node, row, path);
    for (const Node& child : node.children) element(child, row, joined(path, child.key));
  }

  void list(const Node& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::list && node.kind != NodeKind::empty) return wrong(node, row, path);
    for (std::size_t i = 0; i < node.children.size(); ++i) {
      const Node& child = node.children[i];
      const std::string child_path = path + '[' + std::to_string(i) + ']';
      if (child.kind == NodeKind::map) {
        section(child, pattern_below(row), child_path, child.at);
      } else {
        problems_.error(child.at, child_path, kind_words(child) + ", expected a section");
      }
    }
  }

  void scalar_list(const Node& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::list) return wrong(node, row, path);
    std::vector<std::string> seen;
    for (std::size_t i = 0; i < node.children.size(); ++i) {
      const Node& child = node.children[i];
      const std::string child_path = path + '[' + std::to_string(i) + ']';
      element(child, row, child_path);
      if (child.kind != NodeKind::scalar || !is_good(row, child.text)) continue;
      // Numbers by value, so that 13 and 13.0 are the same.
      const std::string same =
          row.type == Type::number_list ? shown(number_of(child.text).value_or(0)) : child.text;
      if (std::find(seen.begin(), seen.end(), same) != seen.end())
        problems_.error(child.at, child_path, "found " + shown(child.text) + " twice, expected once");
      seen.push_back(same);
    }
  }

  void element(const Node& node, const SettingRow& row, const std::string& path) {
    if (node.kind == NodeKind::scalar && is_good(row, node.text)) return;
    const std::string more = node.kind == NodeKind::scalar ? hint(row, node.text) : "";
    problems_.error(node.at, path, kind_words(node) + ", expected " + expected_element(row) + more);
  }

  void scalar(const Node& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::scalar) return wrong(node, row, path);
    if (const auto wrong_value = complaint(row, node.text)) problems_.error(node.at, path, *wrong_value);
  }

  Problems& problems_;
};

}  // namespace

void validate(const Node& root, Problems& problems) {
  if (root.kind != NodeKind::map) {
    const std::string found = root.kind == NodeKind::empty ? "found nothing" : kind_words(root);
    problems.error(root.at, "", found + ", expected the sections of a configuration (site, analyzers, ...)");
    return;
  }
  Validator(problems).section(root, "", "", root.at);
}

std::optional<std::string> complaint(const SettingRow& row, std::string_view text) {
  if (is_good(row, text)) return std::nullopt;
  if (row.type == Type::url || row.type == Type::variable)
    return "found something else (not shown), expected " + expected(row);
  return "found " + shown(text) + ", expected " + expected(row) + hint(row, text);
}

std::string joined(const std::string& path, const std::string& name) {
  return path.empty() ? shown_key(name) : path + '.' + shown_key(name);
}

}  // namespace agreed::settings_file
