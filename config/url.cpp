#include "config/url.hpp"

#include <algorithm>
#include <array>

#include <arpa/inet.h>

#include "config/value_text.hpp"

namespace agreed::settings_file {
namespace {

bool is_ipv4(const std::string& text) {
  std::array<unsigned char, 4> address{};
  return inet_pton(AF_INET, text.c_str(), address.data()) == 1;
}

bool is_ipv6(const std::string& text) {
  std::array<unsigned char, 16> address{};
  return inet_pton(AF_INET6, text.c_str(), address.data()) == 1;
}

bool is_host_name(std::string_view text) {
  const auto allowed = [](char c) {
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '-' ||
           c == '.' || c == '_';
  };
  return !text.empty() && text.front() != '.' && text.front() != '-' &&
         std::all_of(text.begin(), text.end(), allowed);
}

bool is_port(std::string_view text) {
  const auto port = text.empty() || text.front() == '+' ? std::nullopt : whole_number_of(text);
  return port && *port >= 1 && *port <= 65'535;
}

/// Splits "host:port" or "[address]:port"; nothing if either is wrong.
std::optional<std::string> host_of(std::string_view authority) {
  std::string_view host = authority, rest;
  if (!authority.empty() && authority.front() == '[') {
    const std::size_t close = authority.find(']');
    if (close == std::string_view::npos) return std::nullopt;
    host = authority.substr(1, close - 1);
    rest = authority.substr(close + 1);
    if (!is_ipv6(std::string(host))) return std::nullopt;
  } else {
    host = authority.substr(0, authority.find(':'));
    rest = authority.substr(host.size());
    if (!is_host_name(host)) return std::nullopt;
  }
  if (!rest.empty() && (rest.front() != ':' || !is_port(rest.substr(1)))) return std::nullopt;
  return std::string(host);
}

}  // namespace

std::optional<UrlParts> url_parts(std::string_view url) {
  constexpr std::string_view kPlain = "http://", kEncrypted = "https://";
  UrlParts parts;
  parts.encrypted = url.substr(0, kEncrypted.size()) == kEncrypted;
  const std::string_view scheme = parts.encrypted ? kEncrypted : kPlain;
  const bool visible = std::all_of(url.begin(), url.end(), [](char c) { return c > ' ' && c < 0x7F; });
  if (url.substr(0, scheme.size()) != scheme || !visible) return std::nullopt;
  const std::string_view after = url.substr(scheme.size());
  const std::string_view authority = after.substr(0, after.find_first_of("/?#"));
  const auto host = host_of(authority);
  if (!host) return std::nullopt;
  parts.host = *host;
  parts.origin = std::string(scheme) + std::string(authority);
  return parts;
}

bool is_loopback(const std::string& host) {
  return host == "localhost" || host == "::1" || (is_ipv4(host) && host.substr(0, 4) == "127.");
}

bool is_listen_address(const std::string& text) {
  return text == "localhost" || is_ipv4(text) || is_ipv6(text);
}

}  // namespace agreed::settings_file
