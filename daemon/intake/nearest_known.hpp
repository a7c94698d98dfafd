#pragma once
// "Did you mean": the known name nearest to a mistyped one.
#include <string>
#include <string_view>
#include <vector>

namespace agreed {

/// What to say after an unknown `name`: `did you mean "protein"?` if one of `known` is near, else `there are:
/// a, b, c`, at most ten of them.
[[nodiscard]] std::string known_hint(std::string_view name, const std::vector<std::string_view>& known);

}  // namespace agreed
