#include "daemon/http/gate.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <optional>

#include "core/base/ascii.hpp"

namespace agreed {
namespace {

constexpr std::string_view kLineEnd = "\r\n";
constexpr std::string_view kHeadEnd = "\r\n\r\n";
constexpr std::array<std::string_view, 8> kMethods = {"GET",    "HEAD",  "POST",    "PUT",
                                                      "DELETE", "PATCH", "OPTIONS", "TRACE"};
// The library acts on ranges, encodings and expectations in ways that multiply work: it never sees them.
constexpr std::array<std::string_view, 5> kPassedOn = {"host", "authorization", "if-none-match", "accept",
                                                       "cookie"};

bool is_token_char(char c) {
  constexpr std::string_view others = "!#$%&'*+-.^_`|~";
  return (c >= '0' && c <= '9') || (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') ||
         others.find(c) != std::string_view::npos;
}

bool is_token(std::string_view text) {
  return !text.empty() && std::all_of(text.begin(), text.end(), is_token_char);
}

/// Visible characters, space, tab, and bytes beyond ASCII (obs-text).
bool is_field_value(std::string_view text) {
  return std::all_of(text.begin(), text.end(), [](char c) {
    const auto byte = static_cast<unsigned char>(c);
    return (byte >= 0x20 && byte != 0x7f) || byte == '\t';
  });
}

/// True if the comma-separated list `value` has `word`, whatever the case of letters.
bool lists(std::string_view value, std::string_view word) {
  while (!value.empty()) {
    const auto comma = std::min(value.find(','), value.size());
    if (ascii::lower(ascii::trimmed(value.substr(0, comma))) == word) return true;
    value.remove_prefix(std::min(comma + 1, value.size()));
  }
  return false;
}

/// What the header fields say about how the request ends.
struct Framing {
  int hosts = 0;
  int lengths = 0;
  std::optional<std::size_t> length;
  bool transfer_encoding = false, content_encoding = false;
};

Refusal read_request_line(std::string_view line, const GateLimits& limits, Gated& gated) {
  const auto first = line.find(' ');
  const auto last = line.rfind(' ');
  if (first == std::string_view::npos || first == last)
    return {400, "The request line must be: METHOD PATH HTTP/1.1"};
  gated.method = line.substr(0, first);
  gated.target = line.substr(first + 1, last - first - 1);
  const std::string_view version = line.substr(last + 1);
  if (!is_token(gated.method)) return {400, "The method is not a token."};
  if (gated.target.size() > limits.target) return {414, "The target is longer than 2048 bytes."};
  const bool visible = std::all_of(gated.target.begin(), gated.target.end(),
                                   [](char c) { return c > 0x20 && c < 0x7f && c != '#'; });
  if (gated.target.empty() || gated.target.front() != '/' || !visible)
    return {400, "The target must be a path that begins with / and has no spaces or control characters."};
  if (version != "HTTP/1.1" && version != "HTTP/1.0") {
    if (version.substr(0, 5) == "HTTP/") return {505, "HTTP/1.1 and HTTP/1.0 are spoken here."};
    return {400, "The request line must end with HTTP/1.1"};
  }
  if (std::find(kMethods.begin(), kMethods.end(), gated.method) == kMethods.end())
    return {501, "This method is not known here."};
  gated.close = version == "HTTP/1.0";
  return {};
}

Refusal read_field(std::string_view line, Gated& gated, Framing& framing) {
  const auto colon = line.find(':');
  if (colon == std::string_view::npos || !is_token(line.substr(0, colon)))
    return {400, "A header field must be: Name: value, on one line"};
  const std::string name = ascii::lower(line.substr(0, colon));
  const std::string_view value = ascii::trimmed(line.substr(colon + 1));
  if (!is_field_value(value)) return {400, "A header field holds a control character."};
  if (name == "host") ++framing.hosts;
  if (name == "transfer-encoding") framing.transfer_encoding = true;
  if (name == "content-encoding") framing.content_encoding = true;
  if (name == "connection" && lists(value, "close")) gated.close = true;
  if (name == "expect" && ascii::lower(value) == "100-continue") gated.expects_100 = true;
  if (name == "content-length") {
    ++framing.lengths;
    std::size_t length = 0;
    const auto [end, error] = std::from_chars(value.data(), value.data() + value.size(), length);
    if (end != value.data() + value.size() || value.empty()) return {400, "Content-Length is not a number."};
    framing.length = error == std::errc() ? length : std::string_view::npos;
  }
  if (std::find(kPassedOn.begin(), kPassedOn.end(), name) != kPassedOn.end())
    gated.head.append(name).append(": ").append(value).append(kLineEnd);
  return {};
}

Refusal judge(const Framing& framing, const GateLimits& limits, Gated& gated) {
  const bool needs_host = gated.head.find(" HTTP/1.1\r\n") != std::string::npos;
  if (framing.hosts > 1 || (framing.hosts == 0 && needs_host))
    return {400, "Exactly one Host header field is needed."};
  if (framing.transfer_encoding && framing.lengths > 0)
    return {400, "Transfer-Encoding beside Content-Length leaves the end of the request in doubt."};
  if (framing.transfer_encoding) return {411, "Send the body with Content-Length, not in chunks."};
  if (framing.lengths > 1) return {400, "Content-Length is given twice."};
  if (framing.content_encoding) return {415, "Send the body as it is, without Content-Encoding."};
  if (framing.length.value_or(0) > limits.body)
    return {413, "A body may have " + std::to_string(limits.body) + " bytes at most."};
  const bool brings_body = gated.method == "POST" || gated.method == "PUT" || gated.method == "PATCH";
  if (brings_body && !framing.length) return {411, "Content-Length is needed."};
  gated.body_length = framing.length.value_or(0);
  return {};
}

/// Reads the head without its last empty line: every line in it ends with CRLF.
Refusal read_head(std::string_view head, const GateLimits& limits, Gated& gated) {
  Framing framing;
  std::size_t fields = 0;
  for (bool request_line = true; !head.empty(); request_line = false) {
    const auto end = head.find(kLineEnd);
    const std::string_view line = head.substr(0, end);
    head.remove_prefix(end + kLineEnd.size());
    if (line.find_first_of("\r\n") != std::string_view::npos) return {400, "Lines must end with CR LF."};
    if (!request_line && ++fields > limits.fields) return {431, "There are too many header fields."};
    Refusal refusal =
        request_line ? read_request_line(line, limits, gated) : read_field(line, gated, framing);
    if (refusal.status != 0) return refusal;
    if (request_line) gated.head.assign(line).append(kLineEnd);
  }
  return judge(framing, limits, gated);
}

/// The head has not ended yet: what can be said of it already.
Refusal judge_beginning(std::string_view bytes, const GateLimits& limits) {
  if (bytes.size() <= limits.head) return {};
  if (bytes.find('\n') > limits.target) return {414, "The request line is too long."};
  return {431, "The request head is longer than " + std::to_string(limits.head) + " bytes."};
}

}  // namespace

Gated look_at(std::string_view bytes, const GateLimits& limits) {
  Gated gated;
  // Clients of old end a body with an extra CRLF: it is not part of the next request (RFC 9112, 2.2).
  const std::size_t skipped = bytes.substr(0, 2) == kLineEnd ? 2 : 0;
  const auto end = bytes.find(kHeadEnd, skipped);
  if (end == std::string_view::npos || end + kHeadEnd.size() > limits.head) {
    gated.refusal = judge_beginning(
        bytes.substr(0, end == std::string_view::npos ? bytes.size() : end + kHeadEnd.size()), limits);
    return gated;
  }
  gated.head_complete = true;
  gated.head_length = end + kHeadEnd.size();
  gated.refusal = read_head(bytes.substr(skipped, end + kLineEnd.size() - skipped), limits, gated);
  gated.head.append(kLineEnd);
  return gated;
}

}  // namespace agreed
