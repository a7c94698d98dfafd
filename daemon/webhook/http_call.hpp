#pragma once
// One HTTP call, a POST or a GET, under one hard deadline. The only unit that knows the HTTP library's
// client, which by itself has no total deadline, no limit on an answer, and cannot be interrupted while it
// connects.
#include <cstddef>
#include <filesystem>
#include <optional>
#include <stop_token>
#include <string>
#include <utility>
#include <vector>

#include "core/base/instant.hpp"

namespace agreed {

struct CallRequest {
  std::string method = "POST";  ///< or "GET", then without content_type and body
  std::string url;              ///< http:// or https://, without user or fragment
  std::vector<std::pair<std::string, std::string>> headers;
  std::string content_type;
  std::string body;                              ///< sent byte for byte
  std::optional<std::filesystem::path> ca_file;  ///< PEM; instead of the system's certificates
};

struct CallLimits {
  Duration connect = std::chrono::seconds(5);
  Duration whole = std::chrono::seconds(10);    ///< from name look-up to the last byte
  std::size_t answer = std::size_t{64} * 1024;  ///< bytes of the answer's body that are read
};

struct CallAnswer {
  int status = 0;           ///< 0: no answer came
  std::string error;        ///< in words, when no answer came
  std::string retry_after;  ///< that header, as sent
  std::string body;         ///< its beginning, as sent (not decompressed); never for readers of ours
  bool stopped = false;     ///< `stop` was requested before an answer came: nothing is known
};

/// Blocks at most limits.whole, or until `stop` is requested, and a quarter of a second. Redirects are not
/// followed; certificate and host name are verified. Once the head of an answer has come its status is the
/// answer, even if the rest is too long or too slow: the other side has decided, asking again would double
/// the message. Never throws for anything the network or the URL does.
[[nodiscard]] CallAnswer http_call(const CallRequest& request, const CallLimits& limits,
                                   const std::stop_token& stop);

}  // namespace agreed
