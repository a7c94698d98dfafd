#include "daemon/webhook/endpoint.hpp"

#include "daemon/version.hpp"
#include "daemon/webhook/cloud_event.hpp"
#include "daemon/webhook/secrets.hpp"

namespace agreed {

Endpoint endpoint_of(const Route& route) {
  return {route.name, route.url, route.ca_file, load_signing_keys(route)};
}

CallAnswer deliver(const Endpoint& endpoint, std::string_view webhook_id, std::string_view body, Instant at,
                   const CallLimits& limits, const std::stop_token& stop) {
  CallRequest request;
  request.url = endpoint.url;
  request.content_type = kCloudEventContentType;
  request.body = body;
  request.ca_file = endpoint.ca_file;
  request.headers = {{"User-Agent", std::string("agreed/") + version()},
                     {"webhook-id", std::string(webhook_id)},
                     {"webhook-timestamp", webhook_timestamp(at)}};
  if (!endpoint.keys.empty())
    request.headers.emplace_back("webhook-signature", webhook_signature(webhook_id, at, body, endpoint.keys));
  return http_call(request, limits, stop);
}

}  // namespace agreed
