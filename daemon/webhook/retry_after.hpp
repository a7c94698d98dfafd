#pragma once
// The Retry-After header (RFC 9110, section 10.2.3).
#include <optional>
#include <string_view>

#include "core/base/instant.hpp"

namespace agreed {

/// How long from `now` the other side asks us to wait: a whole number of seconds, or an HTTP-date in its
/// preferred form ("Sun, 06 Nov 1994 08:49:37 GMT"). Not below zero, at most a year; nothing for anything
/// else.
[[nodiscard]] std::optional<Duration> parse_retry_after(std::string_view header, Instant now);

}  // namespace agreed
