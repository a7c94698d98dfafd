#pragma once
// Holds a tree against the schema, key by key. What rules connect several keys is checked where they are
// read.
#include <string>

#include "config/node.hpp"
#include "config/problems.hpp"

namespace agreed::settings_file {

/// Adds every key that is unknown, missing, of the wrong type, out of range or not available yet.
void validate(const TreeNode& root, Problems& problems);

/// The path of a child: "analyzers" + "line1".
[[nodiscard]] std::string joined(const std::string& path, const std::string& name);

}  // namespace agreed::settings_file
