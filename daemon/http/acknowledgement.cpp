#include "daemon/http/acknowledgement.hpp"

#include <array>
#include <string_view>

#include <nlohmann/json.hpp>

#include "daemon/http/text_fields.hpp"

namespace agreed {
namespace {

constexpr std::size_t kLongestBy = 100, kLongestNote = 1000;

AcknowledgeBody wrong(const std::string& what) {
  return {"", "", what + R"( Expected: {"by": "who", "note": "what was found or done"}.)"};
}

}  // namespace

AcknowledgeBody read_acknowledge(const std::string& body) {
  constexpr std::array<std::string_view, 2> fields = {"by", "note"};
  const TextFields given = read_text_fields(body, fields);
  if (!given.error.empty()) return wrong(given.error);
  AcknowledgeBody read{given["by"], given["note"], ""};
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
