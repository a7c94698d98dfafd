#include "daemon/render/intervention_json.hpp"

#include "daemon/render/json_parts.hpp"

namespace agreed {

std::string intervention_json(const JournalIntervention& intervention) {
  return json_text({{"id", std::to_string(intervention.id)},
                    {"analyzer", intervention.analyzer},
                    {"standard", json_words(intervention.standard)},
                    {"measurand", json_words(intervention.measurand)},
                    {"kind", intervention.kind},
                    {"at", to_rfc3339(intervention.at)},
                    {"by", intervention.by},
                    {"note", intervention.note}});
}

}  // namespace agreed
