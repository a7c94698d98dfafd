#include "daemon/engine/service_watch.hpp"

#include <algorithm>
#include <cmath>

#include "daemon/printable.hpp"

namespace agreed {
namespace {
constexpr auto kFailingFor = std::chrono::hours(1);
constexpr double kMegabyte = 1e6;
constexpr double kLeastMegabytes = 200;
constexpr double kLeastShare = 0.1;
// A folder that is there again at the next scan is no one's concern.
constexpr std::uint32_t kLasting = 2;
constexpr int kGone = 410;
// Room comes and goes by a little all the time: an alert ends only with some to spare.
constexpr double kSpare = 1.1;

Finding ceased(AlertKind kind, Subject subject, std::string reason, Instant now) {
  return {.kind = kind,
          .subject = std::move(subject),
          .holds = false,
          .at = now,
          .resolved_reason = std::move(reason)};
}
}  // namespace

std::vector<Finding> inbox_findings(const Settings& settings, std::span<const std::filesystem::path> inboxes,
                                    std::span<const InboxState> states, Instant now) {
  std::vector<Finding> findings;
  for (std::size_t i = 0; i < states.size(); ++i) {
    const InboxState& inbox = states[i];
    const Subject subject{.analyzer = settings.analyzers.at(i).id};
    if (inbox.reachable) {
      findings.push_back(ceased(AlertKind::inbox_unreachable, subject, "reachable_again", now));
    } else if (inbox.hangs || inbox.failed_looks >= kLasting) {
      Finding finding{.kind = AlertKind::inbox_unreachable, .subject = subject, .at = now};
      finding.started_at = inbox.unreachable_since;
      finding.details = {{"inbox", printable(inboxes[i].string())}, {"reason", inbox.reason}};
      findings.push_back(std::move(finding));
    }
  }
  return findings;
}

std::optional<Room> room_for(const std::filesystem::path& folder) {
  std::error_code error;
  const auto space = std::filesystem::space(folder, error);
  if (error) return std::nullopt;
  return Room{static_cast<double>(space.available), static_cast<double>(space.capacity)};
}

std::optional<Finding> storage_finding(const std::filesystem::path& folder, const Room& room,
                                       std::optional<double> least_mb, Instant now) {
  const double least =
      least_mb ? *least_mb * kMegabyte : std::min(kLeastMegabytes * kMegabyte, kLeastShare * room.capacity);
  const Subject subject{.service = "storage"};
  if (room.free >= least * kSpare) return ceased(AlertKind::storage_low, subject, "room_again", now);
  if (room.free >= least) return std::nullopt;
  Finding finding{
      .kind = AlertKind::storage_low, .subject = subject, .severity = Severity::critical, .at = now};
  finding.details = {{"folder", printable(folder.string())},
                     {"least_free_mb", std::round(least / kMegabyte)}};
  return finding;
}

std::optional<Finding> delivery_finding(const Route& route, const std::optional<FailingDelivery>& failing,
                                        Instant now) {
  const Subject subject{.service = route.name};
  if (!failing) return ceased(AlertKind::delivery_failing, subject, "delivered_again", now);
  const bool gone = failing->status == kGone;
  if (!gone && now - failing->since < kFailingFor) return std::nullopt;
  Finding finding{
      .kind = AlertKind::delivery_failing, .subject = subject, .severity = Severity::critical, .at = now};
  finding.started_at = failing->since;
  if (gone)
    finding.details = {{"reason",
                        "its endpoint answers that it is gone for good (410); nothing is sent there "
                        "until the service is started again"}};
  return finding;
}

}  // namespace agreed
