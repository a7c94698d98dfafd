#pragma once
// A section of the tree read by type. Whatever is absent or wrong (and then reported by the validation)
// gives its default, so that reading goes on and finds all other errors.
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "config/node.hpp"
#include "config/problems.hpp"
#include "config/schema.hpp"
#include "core/base/instant.hpp"

namespace agreed::settings_file {

class Section {
 public:
  /// `node` may be null: an absent section, of which everything has its default.
  Section(const TreeNode* node, std::string pattern, std::string path, Position at, Problems& problems);
  /// The whole file.
  static Section top(const TreeNode& root, Problems& problems);

  /// It is there, as a section.
  [[nodiscard]] bool exists() const { return node_ != nullptr; }
  /// The key is there, right or wrong.
  [[nodiscard]] bool given(const std::string& name) const;
  /// The key has a list without elements.
  [[nodiscard]] bool is_empty_list(const std::string& name) const;
  /// The key has a value that can be used.
  [[nodiscard]] bool usable(const std::string& name) const;

  // By name of the key; nothing where the key is absent or wrong and has no default.
  [[nodiscard]] std::optional<std::string> text(const std::string& name) const;
  [[nodiscard]] std::optional<double> number(const std::string& name) const;
  [[nodiscard]] std::optional<int> whole_number(const std::string& name) const;
  /// Nothing also for `none`.
  [[nodiscard]] std::optional<Duration> duration(const std::string& name) const;
  [[nodiscard]] std::optional<Instant> time(const std::string& name) const;
  [[nodiscard]] bool flag(const std::string& name) const;
  /// The elements of a list; one that cannot be used is empty, so that each keeps its place.
  [[nodiscard]] std::vector<std::string> words(const std::string& name) const;
  /// The usable elements of a list.
  [[nodiscard]] std::vector<double> numbers(const std::string& name) const;

  /// The usable texts under the keys of a map, as its keys stand.
  [[nodiscard]] std::map<std::string, std::string> texts(const std::string& name) const;

  [[nodiscard]] Section section(const std::string& name) const;
  /// The sections under ids, sorted by id.
  [[nodiscard]] std::vector<Section> named(const std::string& name) const;
  [[nodiscard]] std::vector<Section> list(const std::string& name) const;

  /// The id under which this section stands.
  [[nodiscard]] const std::string& id() const { return id_; }
  /// Of a key's value, or of the section where the key is absent.
  [[nodiscard]] Position where(const std::string& name) const;
  [[nodiscard]] Position where(const std::string& name, std::size_t element) const;

  void error(const std::string& name, std::string message) const;
  void error(const std::string& name, std::size_t element, std::string message) const;
  /// About the text under `key` of a map.
  void error(const std::string& name, const std::string& key, std::string message) const;
  void warning(const std::string& name, const std::string& key, std::string message) const;
  void warning(const std::string& name, std::string message) const;
  /// About the section itself.
  void error_here(std::string message) const;
  void warning_here(std::string message) const;

 private:
  [[nodiscard]] const TreeNode* find(const std::string& name) const;
  [[nodiscard]] const SettingRow& row(const std::string& name) const;

  const TreeNode* node_;
  std::string pattern_, path_, id_;
  Position at_;
  Problems* problems_;
};

}  // namespace agreed::settings_file
