#pragma once
// A request and its answer as the rest of the service sees them; no HTTP library in sight.
#include <functional>
#include <string>
#include <utility>
#include <vector>

namespace agreed {

/// A request whose head and body came whole, within the limits, and unambiguous.
struct HttpRequest {
  std::string method;         ///< "GET", "HEAD", "POST", ...
  std::string target;         ///< as sent: path and query, still percent-encoded
  std::string authorization;  ///< header fields, empty when absent
  std::string if_none_match;
  std::string accept;
  std::string cookie;
  std::string body;
};

/// Whether it only looks: GET or HEAD.
[[nodiscard]] inline bool reads(const HttpRequest& request) {
  return request.method == "GET" || request.method == "HEAD";
}

struct HttpAnswer {
  int status = 200;
  std::string content_type;
  std::string body;
  std::string etag;                                            ///< with its quotes; empty: none
  std::vector<std::pair<std::string, std::string>> headers{};  ///< further ones
};

/// Called from several threads at once.
using HttpHandler = std::function<HttpAnswer(const HttpRequest&)>;

}  // namespace agreed
