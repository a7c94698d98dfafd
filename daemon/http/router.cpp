#include "daemon/http/router.hpp"

#include <algorithm>
#include <array>
#include <string_view>

#include "daemon/http/access.hpp"
#include "daemon/http/acknowledgement.hpp"
#include "daemon/http/api.hpp"
#include "daemon/http/etag.hpp"
#include "daemon/http/page_side.hpp"
#include "daemon/http/problem.hpp"

namespace agreed {
namespace {

using Endpoint = HttpAnswer (Api::*)(const HttpRequest&, const Target&);

struct ApiRoute {
  std::string_view method;  ///< GET stands for HEAD too
  std::string_view path;    ///< * stands for any one segment
  Endpoint endpoint;
};

constexpr std::array<ApiRoute, 16> kRoutes = {{
    {"GET", "/api/status", &Api::status},
    {"GET", "/api/charts", &Api::charts},
    {"GET", "/api/charts/*/*/*", &Api::chart},
    {"GET", "/api/comparisons", &Api::comparisons},
    {"GET", "/api/comparisons/*", &Api::comparison},
    {"GET", "/api/alerts", &Api::alerts},
    {"GET", "/api/alerts/*", &Api::alert},
    {"POST", "/api/alerts/*/acknowledge", &Api::acknowledge},
    {"POST", "/api/interventions", &Api::intervene},
    {"POST", "/api/messages/*/resend", &Api::resend},
    {"GET", "/api/files", &Api::files},
    {"GET", "/api/readings", &Api::readings},
    {"GET", "/api/openapi.json", &Api::openapi},
    {"GET", "/metrics", &Api::metrics},
    {"GET", "/health/live", &Api::live},
    {"GET", "/health/ready", &Api::ready},
}};

bool matches(std::string_view pattern, const std::vector<std::string>& segments) {
  for (const std::string& segment : segments) {
    if (pattern.empty()) return false;
    pattern.remove_prefix(1);
    const auto end = std::min(pattern.find('/'), pattern.size());
    if (pattern.substr(0, end) != "*" && pattern.substr(0, end) != segment) return false;
    pattern.remove_prefix(end);
  }
  return pattern.empty();
}

bool begins(const Target& target, std::string_view first_segment) {
  return !target.segments.empty() && target.segments.front() == first_segment;
}

HttpAnswer not_found(const HttpRequest& request) {
  return problem(404, "There is nothing at this path.", request.target);
}

HttpAnswer not_allowed(const HttpRequest& request, const char* allowed) {
  HttpAnswer answer = problem(405, "Methods this path knows: " + std::string(allowed) + ".", request.target);
  answer.headers.emplace_back("Allow", allowed);
  return answer;
}

/// 304 when the asker has this very body already. Its Content-Length is what 200 would have had (RFC 9110,
/// 8.6).
HttpAnswer unless_known(const HttpRequest& request, HttpAnswer answer) {
  if (!reads(request) || answer.status != 200 || !etag_matches(request.if_none_match, answer.etag))
    return answer;
  answer.status = 304;
  answer.headers.emplace_back("Content-Length", std::to_string(answer.body.size()));
  answer.body.clear();
  return answer;
}

}  // namespace

struct Router::Impl {
  explicit Impl(RouterParts given)
      : parts(std::move(given)),
        api(parts.service, parts.tokens, parts.alerts, parts.intake, parts.stopping),
        pages(parts.pages, parts.tokens, parts.reads_need_token,
              [this](const std::string& alert, const std::string& by, const std::string& note) {
                return acknowledge(alert, by, note);
              }) {}

  /// What the page's form asks for is what the API would be asked for.
  HttpAnswer acknowledge(const std::string& alert, const std::string& by, const std::string& note) {
    HttpRequest request;
    request.method = "POST";
    request.target = "/api/alerts/" + alert + "/acknowledge";
    request.body = write_acknowledge(by, note);
    Target target;
    target.segments = {"api", "alerts", alert, "acknowledge"};
    return api.acknowledge(request, target);
  }

  /// Method, then token, then existence: whether a thing exists is told only to those who may know.
  HttpAnswer route(const HttpRequest& request, const Target& target) {
    const std::string_view method = reads(request) ? std::string_view("GET") : request.method;
    const ApiRoute* route = nullptr;
    const char* allowed = nullptr;
    for (const ApiRoute& candidate : kRoutes) {
      if (!matches(candidate.path, target.segments)) continue;
      allowed = candidate.method == "GET" ? "GET, HEAD" : "POST";
      if (candidate.method == method) route = &candidate;
    }
    if (!begins(target, "api") && !begins(target, "health") && !begins(target, "metrics"))
      return pages.answer(request, target);
    if (allowed && !route) return not_allowed(request, allowed);
    if (auto refusal = refuse(request, target)) return *refusal;
    return route ? (api.*route->endpoint)(request, target) : not_found(request);
  }

  std::optional<HttpAnswer> refuse(const HttpRequest& request, const Target& target) const {
    if (!reads(request)) return refused(request, Role::operator_, parts.tokens);
    if (!parts.reads_need_token || begins(target, "health")) return std::nullopt;
    return refused(request, Role::reader, parts.tokens);
  }

  RouterParts parts;
  Api api;
  PageSide pages;
};

Router::Router(RouterParts parts) : impl_(std::make_unique<Impl>(std::move(parts))) {}
Router::~Router() = default;

HttpAnswer Router::answer(const HttpRequest& request) {
  const auto target = take_apart(request.target);
  if (!target) return not_found(request);
  return unless_known(request, impl_->route(request, *target));
}

}  // namespace agreed
