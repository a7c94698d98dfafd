#pragma once
// What kind of answer is asked for (the Accept field, RFC 9110, 12.5.1).
#include <string_view>

namespace agreed {

/// Whether `accept` names text/csv, and application/json not before it: with a higher quality, or with the
/// same and earlier. JSON is the answer to whoever names neither.
[[nodiscard]] bool prefers_csv(std::string_view accept);

}  // namespace agreed
