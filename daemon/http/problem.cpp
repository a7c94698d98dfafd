#include "daemon/http/problem.hpp"

#include "daemon/render/json_parts.hpp"

namespace agreed {

const char* status_title(int status) {
  switch (status) {
    case 400:
      return "Bad Request";
    case 401:
      return "Unauthorized";
    case 403:
      return "Forbidden";
    case 404:
      return "Not Found";
    case 405:
      return "Method Not Allowed";
    case 408:
      return "Request Timeout";
    case 409:
      return "Conflict";
    case 411:
      return "Length Required";
    case 413:
      return "Content Too Large";
    case 414:
      return "URI Too Long";
    case 415:
      return "Unsupported Media Type";
    case 422:
      return "Unprocessable Content";
    case 431:
      return "Request Header Fields Too Large";
    case 500:
      return "Internal Server Error";
    case 501:
      return "Not Implemented";
    case 503:
      return "Service Unavailable";
    case 505:
      return "HTTP Version Not Supported";
    default:
      return "Error";
  }
}

HttpAnswer problem(int status, const std::string& detail, std::string_view target, const std::string& field) {
  Json document = {{"type", "about:blank"},
                   {"title", status_title(status)},
                   {"status", status},
                   {"detail", detail},
                   {"instance", json_words(std::string(target.substr(0, target.find('?'))))}};
  if (!field.empty()) document["field"] = field;
  return {status, "application/problem+json", json_text(document), "", {}};
}

std::string problem_detail(const HttpAnswer& answer) {
  const Json document = Json::parse(answer.body, nullptr, false);
  if (document.is_object() && document.contains("detail") && document.at("detail").is_string())
    return document.at("detail").get<std::string>();
  return status_title(answer.status);
}

}  // namespace agreed
