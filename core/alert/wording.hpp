#pragma once
// The words of an alert: one renderer for webhook, API and page.
#include <string>

#include "core/alert/alert.hpp"
#include "core/base/settings.hpp"

namespace agreed {

/// Fills title and text from kind, subject, severity, started_at/between and details: what was found (numbers
/// with units and limits), since when, which analyzer is likely and how sure, what is in doubt, what to do
/// next.
void write_words(Alert& alert, const Settings& settings);

/// Whom or what it is about, by ids: "protein", or "line2, wheat-low, protein".
[[nodiscard]] std::string subject_words(const Subject& subject);

}  // namespace agreed
