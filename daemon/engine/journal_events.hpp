#pragma once
// What a journal holds for the present settings, as the events that a monitor folds.
#include <vector>

#include "core/base/event.hpp"
#include "core/base/settings.hpp"
#include "daemon/journal/journal_reader.hpp"

namespace agreed {

/// Every standing, uncensored reading that a chart or a comparison takes, and every intervention at an
/// analyzer that is configured; each once, in no order. Throws JournalError.
[[nodiscard]] std::vector<Event> journal_events(JournalReader& journal, const Settings& settings);

}  // namespace agreed
