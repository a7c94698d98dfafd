#pragma once
// The body of POST /api/interventions.
#include <string>

#include "daemon/intake/told_intervention.hpp"

namespace agreed {

struct InterventionBody {
  ToldIntervention told;
  std::string field;  ///< which field is at fault; empty: the body as a whole
  std::string error;  ///< what is wrong with the body; empty when nothing is
};

/// Reads {analyzer, standard, measurand, kind, at, by, note}, all of them texts. analyzer, kind and by have
/// to be there; the others may be left out or null. What the texts say is judged by InterventionReader.
[[nodiscard]] InterventionBody read_intervention_body(const std::string& body);

}  // namespace agreed
