#pragma once
// How old the evidence behind an answer is, and whether newer should have come: an answer that nothing new
// has backed for longer than its cadence allows is out of date, whatever it says.
#include <optional>
#include <string>

#include "daemon/render/page_scene.hpp"

namespace agreed {

struct Freshness {
  std::optional<Instant> newest;  ///< when the newest pair was measured
  bool overdue = false;           ///< a cadence is configured, and nothing has come for longer than it allows
  std::string words;              ///< "Newest pair 2026-01-12 14:00 UTC, 42 days ago; one is due every 2 h."
};

/// Age is counted from when the newest pair was measured to `snapshot.at`, not from when it arrived: an old
/// result that comes late is no fresh evidence. Hours of rest are left out, as for alerts. Without a cadence
/// nothing is overdue, and the words tell the age alone. Empty words: no pair yet.
[[nodiscard]] Freshness freshness_of(const Snapshot& snapshot, const ComparisonScene& scene);
/// The same of a check standard's readings.
[[nodiscard]] Freshness freshness_of(const Snapshot& snapshot, const ChartScene& scene);

/// "42 days ago"; "measured by a clock that is ahead" of a time after `now`.
[[nodiscard]] std::string age_words(Instant at, Instant now);

}  // namespace agreed
