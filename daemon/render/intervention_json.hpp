#pragma once
// An intervention as the API tells it.
#include <string>

#include "daemon/journal/journal_types.hpp"

namespace agreed {

/// {"id","analyzer","standard","measurand","kind","at","by","note"}; null: all of the analyzer's.
[[nodiscard]] std::string intervention_json(const JournalIntervention& intervention);

}  // namespace agreed
