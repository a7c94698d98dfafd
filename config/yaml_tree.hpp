#pragma once
// YAML (hence also JSON) to a tree of nodes. Works on the parser's events instead of its documents, because
// only they tell anchors, aliases, tags and every key that is given twice, and because an alias is then never
// followed.
#include <optional>
#include <string>

#include "config/node.hpp"
#include "config/problems.hpp"

namespace agreed::settings_file {

/// Nothing when the text cannot be read at all; what is wrong is added to `problems`. Refused: other than
/// UTF-8, control characters, anchors, aliases, tags, keys given twice, a second document. A byte order mark
/// and CR LF are fine. An empty text gives an empty node.
[[nodiscard]] std::optional<TreeNode> parse_yaml(const std::string& text, Problems& problems);

}  // namespace agreed::settings_file
