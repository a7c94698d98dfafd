#pragma once
// Which names in a drop folder are no results.
#include <string_view>

#include "config/mapped_format.hpp"

namespace agreed {

/// Dot-files, names that end with ~ or begin with ~$, and .tmp, .part, .filepart: other programs' work in
/// progress.
[[nodiscard]] bool is_ignored_name(std::string_view name);

/// The name fits `names.take` and none of `names.ignore`.
[[nodiscard]] bool is_wanted_name(const FileNames& names, std::string_view name);

}  // namespace agreed
