#include "daemon/render/finding_json.hpp"

#include "daemon/render/json_parts.hpp"

namespace agreed {

std::string subject_json(const Subject& subject) {
  return json_text(json_subject(subject));
}

std::string finding_json(const Finding& finding) {
  return json_text({{"holds", finding.holds},
                    {"severity", to_string(finding.severity)},
                    {"started_at", json_time(finding.started_at)},
                    {"started_between", json_period(finding.started_between)},
                    {"resolved_reason", json_words(finding.resolved_reason)},
                    {"details", json_details(finding.details)}});
}

}  // namespace agreed
