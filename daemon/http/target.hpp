#pragma once
// The target of a request taken apart: path segments and query parameters, decoded by our own code.
#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

namespace agreed {

/// Decodes %XX (and, in a query, + to a space); nothing for a malformed escape.
[[nodiscard]] std::optional<std::string> percent_decoded(std::string_view text, bool plus_is_space);

struct Target {
  std::string path;                   ///< as sent, without the query
  std::string query;                  ///< as sent, without the ?
  std::vector<std::string> segments;  ///< decoded, each of 1 to 64 bytes
  std::vector<std::pair<std::string, std::string>> parameters;

  /// The first parameter of that name.
  [[nodiscard]] const std::string* parameter(std::string_view name) const;
};

/// Nothing for a path that tries to leave or cannot name anything here: an empty or too long segment, `.` or
/// `..`, a decoded slash, backslash or control character, a malformed escape. "/" has no segments.
[[nodiscard]] std::optional<Target> take_apart(std::string_view target);

}  // namespace agreed
