#pragma once
// The right name nearest to a mistyped one.
#include <cstddef>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace agreed::settings_file {

/// Insertions, deletions, replacements and exchanges of neighbours between two texts, letter case ignored
/// (optimal string alignment distance, after Damerau 1964).
[[nodiscard]] std::size_t edit_distance(std::string_view a, std::string_view b);

/// The nearest of `names` if it is near enough to be meant: at most a third of the letters differ, or one
/// begins the other. Of several the first.
[[nodiscard]] std::optional<std::string> nearest(std::string_view name,
                                                 const std::vector<std::string>& names);

/// "; did you mean X?", or nothing.
[[nodiscard]] std::string did_you_mean(std::string_view name, const std::vector<std::string>& names);

/// "a, b, c", at most twelve and how many more.
[[nodiscard]] std::string enumerated(const std::vector<std::string>& names);

}  // namespace agreed::settings_file
