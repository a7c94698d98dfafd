#pragma once
// A time as people type it behind an option.
#include <optional>
#include <string_view>

#include "core/base/instant.hpp"

namespace agreed {

/// What to type, for messages.
inline constexpr const char* kTimeForms =
    "a date (2026-01-31, its midnight in UTC) or a time with its offset (2026-01-31T06:00:00Z)";

/// Nothing when `text` is neither.
[[nodiscard]] std::optional<Instant> time_argument(std::string_view text);

}  // namespace agreed
