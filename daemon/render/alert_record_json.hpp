#pragma once
// GET /api/alerts and GET /api/alerts/{id}: stored alerts with their history and deliveries.
#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "daemon/journal/journal.hpp"

namespace agreed {

/// The alert as its newest transition stored it, with `history` (each transition: at, change, severity,
/// state, title, acknowledged, resolved_reason) and `deliveries` (each message and what became of it).
/// A stored body that is not a JSON object throws std::runtime_error.
[[nodiscard]] std::string alert_record_json(const AlertRecord& record);

/// {"alerts":[...],"next":...}: `next` is the cursor of the following page, null on the last one.
[[nodiscard]] std::string alert_records_json(const std::vector<AlertRecord>& records,
                                             const std::optional<std::string>& next);

/// The id of a stored alert.
[[nodiscard]] std::int64_t alert_record_id(const AlertRecord& record);

}  // namespace agreed
