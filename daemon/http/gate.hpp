#pragma once
// The gate before the HTTP library: looks at the bytes that came and says whether they begin with one
// well-formed, bounded, unambiguous request (RFC 9112), and where it ends. The library accepts endless and
// doubtful heads; it only ever sees what passed here.
#include <cstddef>
#include <string>
#include <string_view>

namespace agreed {

struct GateLimits {
  std::size_t head = 8192;    ///< bytes of request line and header fields together
  std::size_t target = 2048;  ///< bytes of the target
  std::size_t fields = 64;    ///< header fields
  std::size_t body = 16384;   ///< bytes
};

/// Why a request is refused.
struct Refusal {
  int status = 0;  ///< 0: not refused
  std::string detail;
};

/// What the gate saw at the beginning of the bytes.
struct Gated {
  bool head_complete = false;
  Refusal refusal;              ///< when refused, the connection must be closed after the answer
  std::size_t head_length = 0;  ///< bytes up to and with the empty line
  std::size_t body_length = 0;
  bool close = false;          ///< the client wants, or its version means, no further request
  bool expects_100 = false;    ///< it waits for 100 Continue before it sends the body
  std::string method, target;  ///< as sent
  std::string head;  ///< the request for the library: the request line and the few fields that matter, their
                     ///< names in small letters
};

/// Refused are: a line without CRLF, control characters, folded or nameless fields, a head beyond the limits
/// (431; request line 414), a target that is not a path, HTTP other than 1.0 and 1.1 (505), an unknown method
/// (501), no Host or two, any Transfer-Encoding (411; beside Content-Length 400), any Content-Encoding (415),
/// a Content-Length that is doubled, malformed or beyond the limit (400, 413), a POST, PUT or PATCH without
/// one (411).
[[nodiscard]] Gated look_at(std::string_view bytes, const GateLimits& limits);

}  // namespace agreed
