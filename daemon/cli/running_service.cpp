#include "daemon/cli/running_service.hpp"

#include <algorithm>
#include <cstdlib>
#include <fstream>

#include <nlohmann/json.hpp>

#include "config/unreadable.hpp"
#include "core/base/ascii.hpp"
#include "daemon/cli/listen_url.hpp"
#include "daemon/cli/with_configuration.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/printable.hpp"
#include "daemon/webhook/http_call.hpp"

namespace agreed {
namespace {

constexpr std::size_t kLargestAnswer = std::size_t{16} * 1024 * 1024;
constexpr const char* kTokenHint =
    " Give a token with --token-file FILE or in the environment variable AGREED_TOKEN; `agreed token` makes "
    "one.";

bool is_success(int status) {
  return status >= 200 && status < 300;
}

bool lacks_token(int status) {
  return status == 401 || status == 403;
}

/// The detail of a problem document, else the status.
std::string detail_of(const CallAnswer& answer) {
  const auto document = nlohmann::json::parse(answer.body, nullptr, false);
  if (document.is_object() && document.contains("detail") && document["detail"].is_string())
    return printable(document["detail"].get<std::string>());
  return "The answer was HTTP status " + std::to_string(answer.status) + ".";
}

/// A token is sent in a header line: nothing in it may end that line. It is not repeated in an error.
std::string checked(const std::string& token, const std::string& place) {
  if (token.empty()) throw WrongUse(place + " holds no token");
  if (!std::all_of(token.begin(), token.end(), [](char c) { return c > ' ' && c < '\x7f'; }))
    throw WrongUse(place + " does not hold a token: expected one word of visible ASCII characters");
  return token;
}

}  // namespace

std::string url_of(const std::string& url, const Config& config) {
  if (!url.empty()) return url.substr(0, url.find_last_not_of('/') + 1);
  if (config.listen.port == 0)
    throw WrongUse(
        "listen.port of the configuration is 0, a port chosen at each start: give the URL that the "
        "service printed");
  return listen_url(config.listen.address, config.listen.port);
}

std::string token_from(const std::filesystem::path& file) {
  if (!file.empty()) {
    std::ifstream in(file);
    if (!in) throw WrongUse("the token file cannot be read: " + why_unreadable(file));
    std::string line;
    if (!std::getline(in, line) && !in.eof())
      throw WrongUse("the token file " + file.string() + " cannot be read");
    return checked(std::string(ascii::trimmed(line)), "the token file " + file.string());
  }
  const char* const value = std::getenv("AGREED_TOKEN");  // NOLINT(concurrency-mt-unsafe): nobody sets any
  if (value == nullptr || *value == '\0') return {};
  return checked(std::string(ascii::trimmed(value)), "the environment variable AGREED_TOKEN");
}

ServiceAnswer ask(const RunningService& service, const std::string& method, const std::string& path) {
  CallRequest request;
  request.method = method;
  request.url = service.url + path;
  request.headers = {{"Accept", "application/json"}};
  if (!service.token.empty()) request.headers.emplace_back("Authorization", "Bearer " + service.token);
  if (method == "POST") {
    request.content_type = "application/json";
    request.body = "{}";
  }
  CallLimits limits;
  limits.answer = kLargestAnswer;
  CallAnswer answer = http_call(request, limits, {});
  if (answer.status == 0)
    return {0, "", "the service cannot be reached at " + printable(service.url) + ": " + answer.error};
  if (is_success(answer.status)) return {answer.status, std::move(answer.body), ""};
  return {answer.status, "", detail_of(answer) + (lacks_token(answer.status) ? kTokenHint : "")};
}

int exit_code_of(const ServiceAnswer& answer) {
  if (is_success(answer.status)) return kDone;
  if (lacks_token(answer.status)) return kWrongUse;
  return answer.status == 404 || answer.status == 409 ? kAnswerIsNo : kCouldNotDoIt;
}

}  // namespace agreed
