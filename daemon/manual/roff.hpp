#pragma once
// Text for man(7) pages.
#include <string>
#include <string_view>

namespace agreed::manual {

/// Prose: special signs escaped, lines cut before the 80th column, none begins with a control sign. A
/// hyphen stays one that is typed, so that it can be copied and searched for.
[[nodiscard]] std::string prose(std::string_view text);

/// The same in bold, on one line.
[[nodiscard]] std::string bold(std::string_view text);

/// Lines shown as they are typed.
[[nodiscard]] std::string typed(std::string_view lines);

/// The first line of a page: "agreed" 1 "2026-01-05" "agreed 0.1.0".
[[nodiscard]] std::string title(std::string_view name, int section, std::string_view date,
                                std::string_view source);

[[nodiscard]] std::string section(std::string_view name);

}  // namespace agreed::manual
