#pragma once
// Findings as they are kept in the journal.
#include <string>

#include "core/base/finding.hpp"

namespace agreed {

/// {"analyzer":"line1",...}: the parts a subject has.
[[nodiscard]] std::string subject_json(const Subject& subject);
/// {"holds":true,"severity":"warning","started_at":null,"details":{...}}.
[[nodiscard]] std::string finding_json(const Finding& finding);

}  // namespace agreed
