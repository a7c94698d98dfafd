#pragma once
// Where a route's messages go, and how one of them is posted there.
#include <filesystem>
#include <optional>
#include <stop_token>
#include <string>
#include <string_view>
#include <vector>

#include "config/config.hpp"
#include "daemon/webhook/http_call.hpp"
#include "daemon/webhook/signature.hpp"

namespace agreed {

struct Endpoint {
  std::string route;
  std::string url;
  std::optional<std::filesystem::path> ca_file;
  std::vector<SigningKey> keys;  ///< none: unsigned

  bool operator==(const Endpoint&) const = default;
};

/// Reads the route's secrets; throws std::runtime_error as load_signing_keys does.
[[nodiscard]] Endpoint endpoint_of(const Route& route);

/// Posts `body`, signed for the time of this attempt.
[[nodiscard]] CallAnswer deliver(const Endpoint& endpoint, std::string_view webhook_id, std::string_view body,
                                 Instant at, const CallLimits& limits, const std::stop_token& stop);

}  // namespace agreed
