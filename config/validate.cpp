#include "config/validate.hpp"

#include <algorithm>
#include <set>
#include <vector>

#include "config/nearest.hpp"
#include "config/row_value.hpp"
#include "config/value_text.hpp"

namespace agreed::settings_file {
namespace {

std::string kind_words(const TreeNode& node) {
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
  void section(const TreeNode& map, const std::string& pattern, const std::string& path, Position at) {
    for (const TreeNode& child : map.children) {
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
  void unknown(const TreeNode& child, const std::string& pattern, const std::string& path) {
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

  void value(const TreeNode& node, const SettingRow& row, const std::string& path) {
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
      case Type::text_list:
      case Type::word_list:
      case Type::number_list:
        return scalar_list(node, row, path);
      case Type::word_or_section:
        return node.kind == NodeKind::map ? fixed_section(node, row, path) : scalar(node, row, path);
      default:
        return scalar(node, row, path);
    }
  }

  void wrong(const TreeNode& node, const SettingRow& row, const std::string& path) {
    problems_.error(node.at, path, kind_words(node) + ", expected " + expected(row));
  }

  void fixed_section(const TreeNode& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::map && node.kind != NodeKind::empty) return wrong(node, row, path);
    section(node, pattern_below(row), path, node.key_at);
  }

  void named(const TreeNode& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::map && node.kind != NodeKind::empty) return wrong(node, row, path);
    if (row.is_required && node.children.empty())
      problems_.error(node.key_at, path, "found none, expected at least one");
    for (const TreeNode& child : node.children) {
      const std::string child_path = joined(path, child.key);
      if (!is_id(child.key))
        problems_.error(child.key_at, child_path,
                        "found " + shown(child.key) + ", expected " + expected_id());
      if (row.type == Type::texts_or_sections && child.kind == NodeKind::scalar) {
        element(child, row, child_path);
      } else if (child.kind == NodeKind::map || child.kind == NodeKind::empty) {
        section(child, pattern_below(row), child_path, child.key_at);
      } else {
        problems_.error(child.at, child_path, kind_words(child) + ", expected a section");
      }
    }
  }

  void text_map(const TreeNode& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::map && node.kind != NodeKind::empty) return wrong(node, row, path);
    for (const TreeNode& child : node.children) element(child, row, joined(path, child.key));
  }

  void list(const TreeNode& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::list && node.kind != NodeKind::empty) return wrong(node, row, path);
    for (std::size_t i = 0; i < node.children.size(); ++i) {
      const TreeNode& child = node.children[i];
      const std::string child_path = path + '[' + std::to_string(i) + ']';
      if (child.kind == NodeKind::map) {
        section(child, pattern_below(row), child_path, child.at);
      } else {
        problems_.error(child.at, child_path, kind_words(child) + ", expected a section");
      }
    }
  }

  void scalar_list(const TreeNode& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::list) return wrong(node, row, path);
    std::set<std::string> seen;
    for (std::size_t i = 0; i < node.children.size(); ++i) {
      const TreeNode& child = node.children[i];
      const std::string child_path = path + '[' + std::to_string(i) + ']';
      element(child, row, child_path);
      if (child.kind != NodeKind::scalar || !is_good(row, child.text)) continue;
      // Numbers by value, so that 13 and 13.0 are the same.
      const std::string same =
          row.type == Type::number_list ? shown(number_of(child.text).value_or(0)) : child.text;
      if (!seen.insert(same).second)
        problems_.error(child.at, child_path, "found " + shown(child.text) + " twice, expected once");
    }
  }

  void element(const TreeNode& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::scalar)
      return problems_.error(node.at, path, kind_words(node) + ", expected " + expected_element(row));
    if (const auto wrong_value = element_complaint(row, node.text))
      problems_.error(node.at, path, *wrong_value);
  }

  void scalar(const TreeNode& node, const SettingRow& row, const std::string& path) {
    if (node.kind != NodeKind::scalar) return wrong(node, row, path);
    if (const auto wrong_value = complaint(row, node.text)) problems_.error(node.at, path, *wrong_value);
  }

  Problems& problems_;
};

}  // namespace

void validate(const TreeNode& root, Problems& problems) {
  if (root.kind != NodeKind::map) {
    const std::string found = root.kind == NodeKind::empty ? "found nothing" : kind_words(root);
    problems.error(root.at, "", found + ", expected the sections of a configuration (site, analyzers, ...)");
    return;
  }
  Validator(problems).section(root, "", "", root.at);
}

std::string joined(const std::string& path, const std::string& name) {
  return path.empty() ? shown_key(name) : path + '.' + shown_key(name);
}

}  // namespace agreed::settings_file
