#pragma once
// Asking the running service over HTTP, for commands.
#include <filesystem>
#include <string>

#include "config/config.hpp"

namespace agreed {

/// Where the service is and who asks.
struct RunningService {
  std::string url;    ///< without a slash at its end
  std::string token;  ///< empty: none
};

struct ServiceAnswer {
  int status = 0;  ///< 0: not reachable
  std::string body;
  std::string trouble;  ///< why it is no 2xx, in clean words; what to do about a missing token among them
};

/// `url` if it is given, else where `config` says that the service listens; throws WrongUse if that is a port
/// chosen at its start.
[[nodiscard]] std::string url_of(const std::string& url, const Config& config);

/// The first line of `file` or, without one, the environment variable AGREED_TOKEN, without white space
/// around it; empty if neither is given. Throws WrongUse when the file cannot be read or holds no token.
[[nodiscard]] std::string token_from(const std::filesystem::path& file);

/// `method` GET or POST; `path` as it is sent. At most ten seconds; no redirect is followed.
[[nodiscard]] ServiceAnswer ask(const RunningService& service, const std::string& method,
                                const std::string& path);

/// What an answer that is no 2xx means for the exit status: kWrongUse for a token that does not do,
/// kAnswerIsNo for what is not there or cannot be, kCouldNotDoIt for all else.
[[nodiscard]] int exit_code_of(const ServiceAnswer& answer);

}  // namespace agreed
