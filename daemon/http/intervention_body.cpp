#include "daemon/http/intervention_body.hpp"

#include <array>
#include <string_view>

#include "daemon/http/text_fields.hpp"

namespace agreed {
namespace {

constexpr std::array<std::string_view, 7> kFields = {"analyzer", "standard", "measurand", "kind",
                                                     "at",       "by",       "note"};
constexpr std::array<std::string_view, 4> kMayBeNull = {"standard", "measurand", "at", "note"};
constexpr std::array<std::string_view, 3> kNeeded = {"analyzer", "kind", "by"};

InterventionBody wrong(const std::string& field, const std::string& what) {
  return {
      {},
      field,
      what + R"( Expected: {"analyzer": "which", "kind": "what was done", "by": "who", "note": "...", )" +
          R"("at": "2026-01-05T06:00:00Z"}, and "standard" or "measurand" if it concerns only that one.)"};
}

}  // namespace

InterventionBody read_intervention_body(const std::string& body) {
  const TextFields given = read_text_fields(body, kFields, kMayBeNull);
  if (!given.error.empty()) return wrong(given.field, given.error);
  for (const std::string_view needed : kNeeded)
    if (given[needed].find_first_not_of(" \t\r\n") == std::string::npos)
      return wrong(std::string(needed), "The field " + std::string(needed) + " is missing or empty.");
  return {{given["analyzer"], given["standard"], given["measurand"], given["kind"], given["at"], given["by"],
           given["note"]},
          "",
          ""};
}

}  // namespace agreed
