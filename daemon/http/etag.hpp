#pragma once
// Entity tags (RFC 9110, 8.8.3 and 13.1.2).
#include <string>
#include <string_view>

namespace agreed {

/// A strong tag of a body: the first 128 bits of its SHA-256, with the quotes.
[[nodiscard]] std::string etag_of(std::string_view body);

/// Whether the If-None-Match field `sent` names `etag`: a list of tags or *; weak and strong ones alike (weak
/// comparison).
[[nodiscard]] bool etag_matches(std::string_view sent, std::string_view etag);

}  // namespace agreed
