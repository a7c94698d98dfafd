#pragma once
// Which names in a drop folder are no results.
#include <string_view>

namespace agreed {

/// Dot-files, names that end with ~ or begin with ~$, and .tmp, .part, .filepart: other programs' work in
/// progress.
[[nodiscard]] bool is_ignored_name(std::string_view name);

}  // namespace agreed
