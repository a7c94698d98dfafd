#include "daemon/http/access.hpp"

#include <stdexcept>

#include "config/url.hpp"
#include "core/base/ascii.hpp"
#include "daemon/http/problem.hpp"

namespace agreed {
namespace {

/// The token of "Bearer TOKEN", the scheme in any case of letters; empty when there is none.
std::string bearer_token(const std::string& authorization) {
  constexpr std::string_view scheme = "bearer ";
  if (!ascii::same_letters(std::string_view(authorization).substr(0, scheme.size()), scheme)) return {};
  const auto first = authorization.find_first_not_of(' ', scheme.size());
  return first == std::string::npos ? std::string() : authorization.substr(first);
}

HttpAnswer unauthorized(const HttpRequest& request, const std::string& detail, const char* challenge) {
  HttpAnswer answer = problem(401, detail, request.target);
  answer.headers.emplace_back("WWW-Authenticate", challenge);
  return answer;
}

}  // namespace

bool reads_need_token(const Listen& listen) {
  const bool reachable = listen.behind_proxy || !settings_file::is_loopback(listen.address);
  return reachable && !listen.open_to_network;
}

void require_reader_token(const Listen& listen, Tokens& tokens) {
  if (!reads_need_token(listen) || tokens.any()) return;
  const std::string trouble = tokens.trouble();
  throw std::runtime_error(
      "listen.address " + listen.address + " can be reached by others" +
      (listen.behind_proxy ? " through the proxy (listen.behind_proxy)" : "") +
      ", and no reader token is there to ask for" + (trouble.empty() ? "" : " (" + trouble + ")") +
      ": make one (agreed token CONFIG --role reader), or set listen.open_to_network: true");
}

std::optional<HttpAnswer> refused(const HttpRequest& request, Role needed, Tokens& tokens) {
  const std::string token = bearer_token(request.authorization);
  if (token.empty())
    return unauthorized(request, "A bearer token is needed: Authorization: Bearer TOKEN",
                        R"(Bearer realm="agreed")");
  const auto role = tokens.role_of(token);
  if (!role)
    return unauthorized(request, "The token is not known.",
                        R"(Bearer realm="agreed", error="invalid_token")");
  if (needed == Role::operator_ && *role == Role::reader)
    return problem(403, "A reader's token may not do this; an operator's token is needed.", request.target);
  return std::nullopt;
}

}  // namespace agreed
