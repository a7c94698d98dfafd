// When alerts are sent, held, repeated, and what counts as overdue.
#include <algorithm>
#include <array>
#include <string_view>

#include "config/parts.hpp"

namespace agreed::settings_file {
namespace {

constexpr std::array<std::string_view, 7> kDays = {"mon", "tue", "wed", "thu", "fri", "sat", "sun"};

/// "06:30" is 390 minutes; the form was checked by the validation.
std::chrono::minutes minutes_of(const std::string& day_time) {
  const auto two_digits = [&](std::size_t at) {
    return 10 * (day_time[at] - '0') + (day_time[at + 1] - '0');
  };
  return std::chrono::hours(two_digits(0)) + std::chrono::minutes(two_digits(3));
}

QuietHours quiet_hours_of(const Section& section) {
  QuietHours hours;
  if (const auto days = section.words("days"); !days.empty())
    for (std::size_t day = 0; day < kDays.size(); ++day)
      hours.days.at(day) = std::find(days.begin(), days.end(), kDays.at(day)) != days.end();
  if (const auto from = section.text("from")) hours.from = minutes_of(*from);
  if (const auto to = section.text("to")) hours.to = minutes_of(*to);
  return hours;
}

void read_maintenance(const Section& work, Draft& draft) {
  const auto analyzer = reference<AnalyzerIndex>(work, "analyzer", draft.settings.analyzers);
  const auto from = work.time("from"), to = work.time("to");
  if (from && to && *to <= *from)
    work.error("to", "found a time that is not after from, expected a later one");
  if (analyzer && from && to) draft.config.alert_policy.maintenance.push_back({*analyzer, *from, *to});
}

}  // namespace

void read_alerts(const Section& top, Draft& draft) {
  const Section alerts = top.section("alerts");
  AlertPolicy& policy = draft.config.alert_policy;
  policy.remind_every = alerts.duration("remind_every").value_or(policy.remind_every);
  policy.reopen_within = alerts.duration("reopen_within").value_or(policy.reopen_within);
  policy.hold = alerts.duration("hold").value_or(policy.hold);
  policy.overdue.patience = alerts.number("overdue_after").value_or(policy.overdue.patience);
  for (const Section& hours : alerts.list("quiet")) policy.overdue.quiet.push_back(quiet_hours_of(hours));
  for (const Section& work : alerts.list("maintenance")) read_maintenance(work, draft);
}

}  // namespace agreed::settings_file
