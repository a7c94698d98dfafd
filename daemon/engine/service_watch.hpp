#pragma once
// What the service must say of itself: inboxes that cannot be reached, little room for the journal, endpoints
// that do not take their messages. The state goes in, findings come out; what holds no longer has ceased.
#include <cstdint>
#include <filesystem>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "config/config.hpp"
#include "core/base/finding.hpp"
#include "daemon/intake/sink.hpp"
#include "daemon/journal/journal_types.hpp"

namespace agreed {

/// Of inboxes that are reachable, or have not been for more than one look; lists by AnalyzerIndex.
[[nodiscard]] std::vector<Finding> inbox_findings(const Settings& settings,
                                                  std::span<const std::filesystem::path> inboxes,
                                                  std::span<const InboxState> states, Instant now);

/// Room on the disk where a folder lies, in bytes.
struct Room {
  double free = 0, capacity = 0;
};
/// Nothing when it cannot be told.
[[nodiscard]] std::optional<Room> room_for(const std::filesystem::path& folder);

/// `least_mb`: none: 200, or a tenth of a small disk. Nothing while there is hardly more than that.
[[nodiscard]] std::optional<Finding> storage_finding(const std::filesystem::path& folder, const Room& room,
                                                     std::optional<double> least_mb, Instant now);

/// Told at once when the endpoint said that it is gone for good (410), else after an hour; nothing before.
[[nodiscard]] std::optional<Finding> delivery_finding(const Route& route,
                                                      const std::optional<FailingDelivery>& failing,
                                                      Instant now);

}  // namespace agreed
