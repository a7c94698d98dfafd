#include "config/section.hpp"

#include <algorithm>
#include <stdexcept>
#include <utility>

#include "config/row_value.hpp"
#include "config/validate.hpp"
#include "config/value_text.hpp"

namespace agreed::settings_file {

Section::Section(const TreeNode* node, std::string pattern, std::string path, Position at, Problems& problems)
    : node_(node), pattern_(std::move(pattern)), path_(std::move(path)), at_(at), problems_(&problems) {}

Section Section::top(const TreeNode& root, Problems& problems) {
  return {&root, "", "", root.at, problems};
}

const SettingRow& Section::row(const std::string& name) const {
  const SettingRow* found = find_row(pattern_, name);
  if (found == nullptr) throw std::logic_error("no row in the schema: " + pattern_ + '.' + name);
  return *found;
}

const TreeNode* Section::find(const std::string& name) const {
  return node_ == nullptr ? nullptr : node_->find(name);
}

bool Section::given(const std::string& name) const {
  (void)row(name);
  return find(name) != nullptr;
}

bool Section::is_empty_list(const std::string& name) const {
  return given(name) && find(name)->kind == NodeKind::list && find(name)->children.empty();
}

bool Section::usable(const std::string& name) const {
  const TreeNode* node = find(name);
  return node != nullptr && node->kind == NodeKind::scalar && !complaint(row(name), node->text);
}

std::optional<std::string> Section::text(const std::string& name) const {
  if (usable(name)) return find(name)->text;
  const std::string_view fallback = row(name).fallback;
  if (fallback.empty()) return std::nullopt;
  return std::string(fallback);
}

std::optional<double> Section::number(const std::string& name) const {
  const auto value = text(name);
  return value ? number_of(*value) : std::nullopt;
}

std::optional<int> Section::whole_number(const std::string& name) const {
  const auto value = text(name);
  if (!value) return std::nullopt;
  const auto number = whole_number_of(*value);
  return number ? std::optional(static_cast<int>(*number)) : std::nullopt;
}

std::optional<Duration> Section::duration(const std::string& name) const {
  const auto value = text(name);
  return value ? duration_of(*value) : std::nullopt;
}

std::optional<Instant> Section::time(const std::string& name) const {
  const auto value = text(name);
  return value ? time_of(*value) : std::nullopt;
}

bool Section::flag(const std::string& name) const {
  return flag_of(text(name).value_or("false")).value_or(false);
}

std::vector<std::string> Section::words(const std::string& name) const {
  std::vector<std::string> all;
  const TreeNode* node = find(name);
  (void)row(name);
  if (node == nullptr || node->kind != NodeKind::list) return all;
  for (const TreeNode& child : node->children)
    // Unusable ones keep their place, so that positions of elements are right.
    all.push_back(child.kind == NodeKind::scalar && !complaint(row(name), child.text) ? child.text : "");
  return all;
}

std::vector<double> Section::numbers(const std::string& name) const {
  std::vector<double> all;
  for (const std::string& word : words(name))
    if (const auto value = number_of(word)) all.push_back(*value);
  return all;
}

std::map<std::string, std::string> Section::texts(const std::string& name) const {
  std::map<std::string, std::string> all;
  const TreeNode* node = find(name);
  (void)row(name);
  if (node == nullptr || node->kind != NodeKind::map) return all;
  for (const TreeNode& child : node->children)
    if (child.kind == NodeKind::scalar && !element_complaint(row(name), child.text))
      all.emplace(child.key, child.text);
  return all;
}

Section Section::section(const std::string& name) const {
  const TreeNode* node = find(name);
  const bool is_map = node != nullptr && node->kind == NodeKind::map;
  return {is_map ? node : nullptr, pattern_below(row(name)), joined(path_, name),
          node == nullptr ? at_ : node->key_at, *problems_};
}

std::vector<Section> Section::named(const std::string& name) const {
  std::vector<Section> all;
  const TreeNode* node = find(name);
  const std::string pattern = pattern_below(row(name));
  if (node == nullptr || node->kind != NodeKind::map) return all;
  for (const TreeNode& child : node->children) {
    if (!is_id(child.key)) continue;
    const std::string path = joined(joined(path_, name), child.key);
    all.emplace_back(child.kind == NodeKind::map ? &child : nullptr, pattern, path, child.key_at, *problems_);
    all.back().id_ = child.key;
  }
  std::sort(all.begin(), all.end(), [](const Section& a, const Section& b) { return a.id_ < b.id_; });
  return all;
}

std::vector<Section> Section::list(const std::string& name) const {
  std::vector<Section> all;
  const TreeNode* node = find(name);
  const std::string pattern = pattern_below(row(name));
  if (node == nullptr || node->kind != NodeKind::list) return all;
  for (std::size_t i = 0; i < node->children.size(); ++i) {
    const TreeNode& child = node->children[i];
    const std::string path = joined(path_, name) + '[' + std::to_string(i) + ']';
    all.emplace_back(child.kind == NodeKind::map ? &child : nullptr, pattern, path, child.at, *problems_);
  }
  return all;
}

Position Section::where(const std::string& name) const {
  const TreeNode* node = find(name);
  return node == nullptr ? at_ : node->at;
}

Position Section::where(const std::string& name, std::size_t element) const {
  const TreeNode* node = find(name);
  return node == nullptr || element >= node->children.size() ? where(name) : node->children[element].at;
}

void Section::error(const std::string& name, std::string message) const {
  problems_->error(where(name), joined(path_, name), std::move(message));
}

void Section::error(const std::string& name, std::size_t element, std::string message) const {
  problems_->error(where(name, element), joined(path_, name) + '[' + std::to_string(element) + ']',
                   std::move(message));
}

void Section::error(const std::string& name, const std::string& key, std::string message) const {
  const TreeNode* node = find(name);
  const TreeNode* child = node == nullptr ? nullptr : node->find(key);
  problems_->error(child == nullptr ? where(name) : child->at, joined(joined(path_, name), key),
                   std::move(message));
}

void Section::warning(const std::string& name, const std::string& key, std::string message) const {
  const TreeNode* node = find(name);
  const TreeNode* child = node == nullptr ? nullptr : node->find(key);
  problems_->warning(child == nullptr ? where(name) : child->at, joined(joined(path_, name), key),
                     std::move(message));
}

void Section::warning(const std::string& name, std::string message) const {
  problems_->warning(where(name), joined(path_, name), std::move(message));
}

void Section::error_here(std::string message) const {
  problems_->error(at_, path_, std::move(message));
}

void Section::warning_here(std::string message) const {
  problems_->warning(at_, path_, std::move(message));
}

}  // namespace agreed::settings_file
