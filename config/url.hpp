#pragma once
// The parts of a webhook's URL that matter before it is called.
#include <optional>
#include <string>
#include <string_view>

namespace agreed::settings_file {

struct UrlParts {
  bool encrypted = false;  ///< https
  std::string host;        ///< without the brackets of an IPv6 address
  std::string origin;      ///< "https://host:port", which holds no secret, unlike many a path
};

/// Nothing unless it is http:// or https://, a host, optionally a port and a path, in visible ASCII and
/// without a name and password.
[[nodiscard]] std::optional<UrlParts> url_parts(std::string_view url);

/// localhost, 127.0.0.0/8 and ::1.
[[nodiscard]] bool is_loopback(const std::string& host);

/// An IPv4 or IPv6 address, or localhost.
[[nodiscard]] bool is_listen_address(const std::string& text);

}  // namespace agreed::settings_file
