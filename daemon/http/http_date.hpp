#pragma once
// Times as HTTP header fields have them.
#include <ctime>
#include <string>

namespace agreed {

/// "Tue, 01 Dec 2026 15:18:02 GMT" (RFC 9110, 5.6.7), whatever the locale; empty for a time without a date.
[[nodiscard]] std::string http_date(std::time_t at);

}  // namespace agreed
