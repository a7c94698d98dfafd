#include "daemon/http/acknowledgement.hpp"

#include <nlohmann/json.hpp>

namespace agreed {
namespace {

constexpr std::size_t kLongestBy = 100, kLongestNote = 1000;
constexpr int kDeepest = 2;

AcknowledgeBody wrong(const std::string& what) {
  return {"", "", what + R"( Expected: {"by": "who", "note": "what was found or done"}.)"};
}

}  // namespace

AcknowledgeBody read_acknowledge(const std::string& body) {
  bool too_deep = false;
  const auto watch = [&](int depth, nlohmann::json::parse_event_t, nlohmann::json&) {
    too_deep = too_deep || depth > kDeepest;
    return !too_deep;
  };
  const nlohmann::json json = nlohmann::json::parse(body, watch, false);
  if (too_deep || !json.is_object()) return wrong("The body is not a JSON object.");
  AcknowledgeBody read;
  for (const auto& [name, value] : json.items()) {
    if (name != "by" && name != "note") return wrong("The body has a field other than by and note.");
    if (!value.is_string()) return wrong("The field " + name + " is not text.");
    (name == "by" ? read.by : read.note) = value.get<std::string>();
  }
  if (read.by.find_first_not_of(" \t\r\n") == std::string::npos || read.by.size() > kLongestBy)
    return wrong("The field by must name who acknowledges, in 1 to 100 bytes.");
  if (read.note.size() > kLongestNote) return wrong("The field note may have 1000 bytes at most.");
  return read;
}

std::string write_acknowledge(const std::string& by, const std::string& note) {
  const nlohmann::json json = {{"by", by}, {"note", note}};
  return json.dump(-1, ' ', false, nlohmann::json::error_handler_t::replace);
}

}  // namespace agreed
