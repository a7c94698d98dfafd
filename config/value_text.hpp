#pragma once
// One value as text: what it means, and how it is shown in a message.
#include <optional>
#include <string>
#include <string_view>

#include "core/base/instant.hpp"

namespace agreed::settings_file {

/// A decimal number with "." and optional exponent: no octal, hexadecimal, infinity, digits grouped or
/// leading zeros.
[[nodiscard]] std::optional<double> number_of(std::string_view text);
/// The same without point and exponent.
[[nodiscard]] std::optional<long long> whole_number_of(std::string_view text);
/// `true` or `false`.
[[nodiscard]] std::optional<bool> flag_of(std::string_view text);
/// 500ms, 30s, 15min, 8h, 30d; at most about 100 years.
[[nodiscard]] std::optional<Duration> duration_of(std::string_view text);
/// RFC 3339 with its offset, or a date alone (then 00:00 UTC).
[[nodiscard]] std::optional<Instant> time_of(std::string_view text);
/// [A-Za-z0-9][A-Za-z0-9_-]{0,63}
[[nodiscard]] bool is_id(std::string_view text);

/// In quotes, control characters made visible, at most 60 bytes.
[[nodiscard]] std::string shown(std::string_view text);
/// As part of a key path: like shown(), without quotes where it is a plain word.
[[nodiscard]] std::string shown_key(std::string_view text);
/// The shortest text that reads back as the number.
[[nodiscard]] std::string shown(double value);
/// In the largest unit that gives a whole number: 90d, 36h, 500ms.
[[nodiscard]] std::string shown(Duration duration);

}  // namespace agreed::settings_file
