#pragma once
// RFC 3339 times as text.
#include <optional>
#include <string>
#include <string_view>

#include "core/base/instant.hpp"

namespace agreed {

/// "2026-01-05T06:00:00.000Z".
[[nodiscard]] std::string to_rfc3339(Instant at);

/// For people: "2026-02-05 06:00 UTC".
[[nodiscard]] std::string time_words(Instant at);

/// A date and time that may lack its offset; then `offset_given` is false and `at` is the local time read as
/// UTC.
struct ParsedTime {
  Instant at;
  bool offset_given = false;
};

/// Reads an RFC 3339 date-time (section 5.6). Lower-case t and z, and a space for T, are read; digits beyond
/// the millisecond are cut; a leap second :60 is read as :59.999. Nothing when the text is not such a time.
[[nodiscard]] std::optional<ParsedTime> parse_rfc3339(std::string_view text);

}  // namespace agreed
