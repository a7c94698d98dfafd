#pragma once
// Reading the readings forward, in key order, for the writer and for read-only connections alike. Private to
// daemon/journal.
#include <functional>
#include <string_view>
#include <vector>

#include "daemon/journal/connection.hpp"

namespace agreed::journal {

using TakeReading = std::function<void(Instant, std::int32_t replicate, double value)>;
using TakeSplit = std::function<void(std::string_view sample, Instant, std::int32_t replicate, double value)>;

/// Standing, uncensored readings of one item by (measured_at, replicate).
void each_of_item(SQLite::Database& database, StoredKind kind, std::string_view analyzer,
                  std::string_view measurand, std::string_view item, const TakeReading& take);
/// Standing, uncensored split results by (sample, measured_at, replicate).
void each_split(SQLite::Database& database, std::string_view analyzer, std::string_view measurand,
                const TakeSplit& take);
/// How many censored ones of a check standard stand.
[[nodiscard]] std::int64_t censored_checks(SQLite::Database& database, std::string_view analyzer,
                                           std::string_view measurand, std::string_view item);
/// By (at, id).
[[nodiscard]] std::vector<JournalIntervention> interventions(SQLite::Database& database);
/// The newest transition of each alert, by alert.
[[nodiscard]] std::vector<StoredTransition> last_transitions(SQLite::Database& database);

}  // namespace agreed::journal
