#pragma once
// The configuration text as a tree with a position on every part, whatever notation it was written in.
#include <string>
#include <vector>

namespace agreed::settings_file {

/// Counts from 1; line 0 = the whole file.
struct Position {
  int line = 0, column = 0;
};

enum class NodeKind { empty, scalar, list, map };

struct TreeNode {
  NodeKind kind = NodeKind::empty;
  Position at;       ///< of the value
  std::string key;   ///< of a map's child
  Position key_at;   ///< likewise
  std::string text;  ///< of a scalar
  std::vector<TreeNode> children;

  /// The child of that key; null when there is none.
  [[nodiscard]] const TreeNode* find(const std::string& child_key) const {
    for (const TreeNode& child : children)
      if (child.key == child_key) return &child;
    return nullptr;
  }
};

}  // namespace agreed::settings_file
