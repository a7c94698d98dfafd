#include "config/yaml_tree.hpp"

#include <algorithm>
#include <map>
#include <sstream>
#include <string_view>
#include <utility>

#include <yaml-cpp/depthguard.h>
#include <yaml-cpp/eventhandler.h>
#include <yaml-cpp/exceptions.h>
#include <yaml-cpp/parser.h>

#include "config/utf8.hpp"
#include "config/value_text.hpp"

namespace agreed::settings_file {
namespace {

constexpr std::string_view kByteOrderMark = "\xEF\xBB\xBF";

Position position(const YAML::Mark& mark) {
  return {mark.line + 1, mark.column + 1};
}

Position position_of_byte(std::string_view text, std::size_t offset) {
  const std::string_view before = text.substr(0, offset);
  const auto lines = std::count(before.begin(), before.end(), '\n');
  const std::size_t line_start = before.rfind('\n') == std::string_view::npos ? 0 : before.rfind('\n') + 1;
  return {static_cast<int>(lines) + 1, static_cast<int>(offset - line_start) + 1};
}

/// Builds the tree from the parser's events with a stack of the maps and lists that are still open.
class TreeBuilder final : public YAML::EventHandler {
 public:
  TreeBuilder(std::string_view text, Problems& problems) : text_(text), problems_(problems) {
    line_starts_.push_back(0);
    for (std::size_t i = 0; i < text.size(); ++i)
      if (text[i] == '\n') line_starts_.push_back(i + 1);
  }

  [[nodiscard]] TreeNode take_root() { return std::move(root_); }
  [[nodiscard]] bool found_open_quote() const { return found_open_quote_; }

  void OnDocumentStart(const YAML::Mark&) override {}
  void OnDocumentEnd() override {}
  void OnNull(const YAML::Mark& mark, YAML::anchor_t anchor) override {
    refuse_extras(mark, "?", anchor);
    attach(leaf(NodeKind::empty, mark, ""));
  }
  void OnAlias(const YAML::Mark& mark, YAML::anchor_t) override {
    problems_.error(position(mark), path(), "found an alias (*name); aliases are not read: repeat the value");
    attach(leaf(NodeKind::empty, mark, ""));
  }
  void OnScalar(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                const std::string& value) override {
    refuse_extras(mark, tag, anchor);
    refuse_open_quote(position(mark));
    attach(leaf(NodeKind::scalar, mark, value));
  }
  void OnSequenceStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                       YAML::EmitterStyle::value) override {
    begin(NodeKind::list, mark, tag, anchor);
  }
  void OnSequenceEnd() override { end(); }
  void OnMapStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                  YAML::EmitterStyle::value) override {
    begin(NodeKind::map, mark, tag, anchor);
  }
  void OnMapEnd() override { end(); }

 private:
  struct Open {
    TreeNode node;
    bool awaits_key = true;  // of a map: the next value is a key
    bool key_is_word = true;
    std::string key;
    Position key_at;
    std::map<std::string, int> lines;  // of the keys so far
  };

  static TreeNode leaf(NodeKind kind, const YAML::Mark& mark, const std::string& text) {
    TreeNode node;
    node.kind = kind;
    node.at = position(mark);
    node.text = text;
    return node;
  }

  void refuse_extras(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor) {
    if (anchor != YAML::NullAnchor)
      problems_.error(position(mark), path(), "found an anchor (&name); anchors are not read: remove it");
    // "?" = plain and "" = a collection without a tag, "!" = quoted.
    if (!tag.empty() && tag != "?" && tag != "!")
      problems_.error(position(mark), path(),
                      "found the tag " + shown(tag) + "; tags are not read: remove it");
  }

  /// A quotation mark left open swallows what follows, up to the next one or the end, without an error.
  void refuse_open_quote(Position at) {
    const auto line = static_cast<std::size_t>(at.line - 1);
    if (line >= line_starts_.size()) return;
    std::size_t i = line_starts_[line] + static_cast<std::size_t>(at.column - 1);
    if (i >= text_.size() || (text_[i] != '"' && text_[i] != '\'')) return;
    const char quote = text_[i];
    for (++i; i < text_.size() && text_[i] != '\n'; ++i) {
      const bool apostrophe = quote == '\'' && text_.substr(i, 2) == "''";
      const bool escaped = quote == '"' && text_[i] == '\\';
      if (!apostrophe && !escaped && text_[i] == quote) return;
      if (apostrophe || escaped) ++i;
    }
    found_open_quote_ = true;
    problems_.error(at, path(),
                    "found a quotation mark that is not closed in its line; expected a text in one line");
  }

  void begin(NodeKind kind, const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor) {
    refuse_extras(mark, tag, anchor);
    open_.emplace_back();
    open_.back().node = leaf(kind, mark, "");
  }

  void end() {
    TreeNode done = std::move(open_.back().node);
    open_.pop_back();
    attach(std::move(done));
  }

  void attach(TreeNode node) {
    if (open_.empty()) {
      root_ = std::move(node);
      return;
    }
    Open& parent = open_.back();
    if (parent.node.kind == NodeKind::list) {
      parent.node.children.push_back(std::move(node));
    } else if (parent.awaits_key) {
      take_key(parent, node);
    } else {
      give_value(parent, std::move(node));
    }
  }

  void take_key(Open& map, const TreeNode& node) {
    if (node.kind != NodeKind::scalar)
      problems_.error(node.at, path(), "found something other than a word as a key; expected a word");
    map.awaits_key = false;
    map.key_is_word = node.kind == NodeKind::scalar;
    map.key = node.text;
    map.key_at = node.at;
  }

  void give_value(Open& map, TreeNode node) {
    map.awaits_key = true;
    if (!map.key_is_word) return;
    node.key = map.key;
    node.key_at = map.key_at;
    // An absent value is reported at its key: the parser marks it at whatever comes next.
    if (node.kind == NodeKind::empty) node.at = map.key_at;
    const auto [earlier, first] = map.lines.emplace(map.key, map.key_at.line);
    if (first) {
      map.node.children.push_back(std::move(node));
      return;
    }
    const std::string parent = path();
    problems_.error(map.key_at, parent.empty() ? shown_key(map.key) : parent + '.' + shown_key(map.key),
                    "given twice, first in line " + std::to_string(earlier->second) + "; expected once");
  }

  /// Where the builder is: keys and list positions of everything open.
  [[nodiscard]] std::string path() const {
    std::string text;
    for (const Open& open : open_) {
      if (open.node.kind == NodeKind::list) {
        text += '[' + std::to_string(open.node.children.size()) + ']';
      } else if (!open.awaits_key) {
        if (!text.empty()) text += '.';
        text += shown_key(open.key);
      }
    }
    return text;
  }

  std::string_view text_;
  std::vector<std::size_t> line_starts_;
  Problems& problems_;
  bool found_open_quote_ = false;
  std::vector<Open> open_;
  TreeNode root_;
};

bool is_text(std::string_view text, Problems& problems) {
  if (const auto bad = first_bad_utf8(text)) {
    problems.error(position_of_byte(text, *bad), "",
                   "found a byte that is not UTF-8; expected the whole file in UTF-8");
    return false;
  }
  if (const auto control = first_control(text)) {
    problems.error(position_of_byte(text, *control), "", "found a control character; expected text");
    return false;
  }
  return true;
}

bool is_indented_by_tab(std::string_view text, int line) {
  for (int i = 1; i < line && !text.empty(); ++i)
    text.remove_prefix(
        std::min(text.size(), text.find('\n') == std::string_view::npos ? text.size() : text.find('\n') + 1));
  const std::string_view indentation = text.substr(0, text.find_first_not_of(" \t"));
  return indentation.find('\t') != std::string_view::npos;
}

/// The parser's words, with what most often is behind them.
std::string syntax_message(const YAML::Exception& error, std::string_view text) {
  const std::string message = "not readable as YAML: " + error.msg;
  if (!error.mark.is_null() && is_indented_by_tab(text, error.mark.line + 1))
    return message + " (the line is indented by a tab, expected spaces)";
  const bool structural =
      error.msg.find("not found") != std::string::npos || error.msg.find("illegal") != std::string::npos;
  return structural
             ? message + " (often an indentation, a missing colon, or a quotation mark left open before this)"
             : message;
}

}  // namespace

std::optional<TreeNode> parse_yaml(const std::string& text, Problems& problems) {
  std::string_view body = text;
  if (body.substr(0, kByteOrderMark.size()) == kByteOrderMark) body.remove_prefix(kByteOrderMark.size());
  if (!is_text(body, problems)) return std::nullopt;
  std::istringstream stream{std::string(body)};
  TreeBuilder builder(body, problems);
  try {
    YAML::Parser parser(stream);
    if (!parser.HandleNextDocument(builder)) return TreeNode{};
    TreeNode root = builder.take_root();
    Problems of_the_rest;
    TreeBuilder rest(body, of_the_rest);
    if (parser.HandleNextDocument(rest))
      problems.error({}, "", "found a second document (---); expected one");
    return root;
  } catch (const YAML::DeepRecursion&) {
    problems.error({}, "", "sections and lists are nested too deeply; expected a configuration in YAML");
    return std::nullopt;
  } catch (const YAML::Exception& error) {
    // What follows from a quotation mark left open is told already.
    const Position at = error.mark.is_null() ? Position{} : position(error.mark);
    if (!builder.found_open_quote()) problems.error(at, "", syntax_message(error, body));
    return std::nullopt;
  }
}

}  // namespace agreed::settings_file
