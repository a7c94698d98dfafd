#pragma once
// The service as numbers for a monitoring system: what GET /metrics answers.
#include <optional>
#include <string>
#include <vector>

#include "daemon/engine/snapshot.hpp"
#include "daemon/journal/journal_reader.hpp"

namespace agreed {

/// OpenMetrics text (open_metrics.hpp) of the snapshot and of what waits to be sent (nothing: the journal
/// could not be asked; then those samples are missing). Its number of samples follows from the configuration:
/// no label holds a sample's name, a file or a time. Times are seconds since 1970-01-01 UTC; differences are
/// in the measurand's unit, which agreed_comparison_info names.
[[nodiscard]] std::string metrics_text(const Snapshot& snapshot,
                                       const std::optional<std::vector<MessageCount>>& messages);

}  // namespace agreed
