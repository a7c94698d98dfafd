#include "daemon/cli/replay.hpp"

#include <algorithm>
#include <utility>

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "core/base/rfc3339.hpp"
#include "daemon/cli/past.hpp"
#include "daemon/cli/print_json.hpp"
#include "daemon/cli/progress.hpp"
#include "daemon/cli/replay_report.hpp"
#include "daemon/cli/with_configuration.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/journal/backup.hpp"

namespace agreed {
namespace {

// Two alerts of the same kind and subject this near are the same matter.
constexpr Duration kNear = std::chrono::hours(24);

bool within(const std::optional<Period>& asked, Instant at) {
  return !asked || (at >= asked->first && at < asked->last);
}

std::int64_t readings_within(const Past& past, const std::optional<Period>& asked) {
  return std::count_if(past.events.begin(), past.events.end(), [&](const Event& event) {
    return is_reading(event) && within(asked, time_of(event));
  });
}

std::string why_nothing(const Past& past, const std::optional<Period>& asked) {
  if (past.readings == 0)
    return "There are no readings of what this configuration watches in " + past.from.string() + ".";
  const auto [first, last] =
      std::minmax_element(past.events.begin(), past.events.end(),
                          [](const Event& a, const Event& b) { return time_of(a) < time_of(b); });
  return "There are no readings from " + to_rfc3339(asked->first) + " up to " + to_rfc3339(asked->last) +
         "; there are some from " + to_rfc3339(time_of(*first)) + " to " + to_rfc3339(time_of(*last)) + ".";
}

/// Everything is replayed up to the end of what was asked: what came before it is what the charts learned
/// from.
void forget_later(Past& past, const std::optional<Period>& asked) {
  if (asked) std::erase_if(past.events, [&](const Event& event) { return time_of(event) >= asked->last; });
}

std::vector<AlertEpisode> opened_within(std::vector<AlertEpisode> episodes,
                                        const std::optional<Period>& asked) {
  std::erase_if(episodes, [&](const AlertEpisode& episode) { return !within(asked, episode.opened_at()); });
  return episodes;
}

std::vector<AlertEpisode> run(Replay& replay) {
  Progress progress("replaying");
  while (replay.step())
    progress.show(static_cast<double>(replay.folded()) / static_cast<double>(replay.events()));
  Episodes episodes;
  for (const AlertTransition& transition : replay.transitions()) episodes.add(transition, transition.at);
  return episodes.take();
}

int replay_past(const ReplayCommand& command, const Config& config, Past past) {
  const std::int64_t readings = readings_within(past, command.between);
  if (readings == 0) {
    const std::string why = why_nothing(past, command.between);
    if (command.json)
      print_json({{"error", why}});
    else
      fmt::print("{}\n", why);
    return kAnswerIsNo;
  }
  forget_later(past, command.between);
  const auto [first, last] =
      std::minmax_element(past.events.begin(), past.events.end(),
                          [](const Event& a, const Event& b) { return time_of(a) < time_of(b); });
  const Period period{time_of(*first), time_of(*last)};
  past.readings = std::count_if(past.events.begin(), past.events.end(), is_reading);
  Replay replay(config.settings, config.alert_policy, std::exchange(past.events, {}), past.acknowledgements);
  auto alerts = match_episodes(opened_within(run(replay), command.between),
                               opened_within(std::move(past.told), command.between), kNear);
  past.told.clear();
  const ReplayReport report{std::move(past), command.config.string(), command.between, period,
                            readings,        std::move(alerts)};
  fmt::print("{}", command.json ? replay_json(report) : replay_text(report));
  return kDone;
}

}  // namespace

int replay_command(const ReplayCommand& command) {
  return with_configuration(command.config, command.json, [&](const Config& config) {
    return replay_past(command, config,
                       read_past(config, command.from.empty() ? database_of(config.state) : command.from));
  });
}

}  // namespace agreed
