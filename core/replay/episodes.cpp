#include "core/replay/episodes.hpp"

#include <algorithm>
#include <utility>

namespace agreed {
namespace {

Instant end_of(const AlertEpisode& episode) {
  return episode.ended_at.value_or(Instant::max());
}

/// Careful with the largest time there is: nothing is added to it.
bool meet(const AlertEpisode& a, const AlertEpisode& b, Duration near) {
  return a.kind == b.kind && a.subject == b.subject && a.opened_at() - near <= end_of(b) &&
         b.opened_at() - near <= end_of(a);
}

Instant opening_of(const MatchedEpisodes& matched) {
  return (matched.now ? *matched.now : *matched.then).opened_at();
}

}  // namespace

bool is_replayed(AlertKind kind) {
  switch (kind) {
    case AlertKind::file_rejected:
    case AlertKind::readings_conflict:
    case AlertKind::inbox_unreachable:
    case AlertKind::storage_low:
    case AlertKind::delivery_failing:
      return false;
    default:
      return true;
  }
}

void Episodes::add(const AlertTransition& transition, Instant at) {
  const Alert& alert = transition.alert;
  const auto found = std::find_if(open_.begin(), open_.end(),
                                  [&](std::size_t place) { return all_[place].alert == alert.id; });
  if (found == open_.end()) {
    if (transition.change == AlertChange::resolved) return;  // its opening is not known
    open_.push_back(all_.size());
    all_.push_back({alert.id,
                    {.kind = alert.kind,
                     .subject = alert.subject,
                     .severity = alert.severity,
                     .title = alert.title,
                     .started_at = alert.started_at,
                     .steps = {{AlertChange::opened, at, alert.severity}},
                     .ended_at = {},
                     .resolved_reason = {}}});
    return;
  }
  AlertEpisode& episode = all_[*found].episode;
  episode.title = alert.title;
  episode.started_at = alert.started_at;
  const bool worse = alert.severity > episode.severity;
  episode.severity = std::max(episode.severity, alert.severity);
  if (transition.change == AlertChange::acknowledged || transition.change == AlertChange::resolved || worse)
    episode.steps.push_back({transition.change, at, alert.severity});
  if (transition.change != AlertChange::resolved) return;
  episode.ended_at = at;
  episode.resolved_reason = alert.resolved_reason;
  open_.erase(found);
}

std::vector<AlertEpisode> Episodes::take() {
  std::vector<AlertEpisode> episodes;
  episodes.reserve(all_.size());
  for (Known& known : all_) episodes.push_back(std::move(known.episode));
  all_.clear();
  open_.clear();
  std::stable_sort(episodes.begin(), episodes.end(), [](const AlertEpisode& a, const AlertEpisode& b) {
    return a.opened_at() < b.opened_at();
  });
  return episodes;
}

std::vector<MatchedEpisodes> match_episodes(std::vector<AlertEpisode> now, std::vector<AlertEpisode> then,
                                            Duration near) {
  std::vector<MatchedEpisodes> matched;
  std::vector<bool> taken(then.size());
  for (AlertEpisode& episode : now) {
    MatchedEpisodes row{std::move(episode), {}};
    for (std::size_t i = 0; i < then.size() && !row.then; ++i)
      if (!taken[i] && meet(*row.now, then[i], near)) {
        taken[i] = true;
        row.then = then[i];
      }
    matched.push_back(std::move(row));
  }
  for (std::size_t i = 0; i < then.size(); ++i)
    if (!taken[i]) matched.push_back({{}, std::move(then[i])});
  std::stable_sort(matched.begin(), matched.end(), [](const MatchedEpisodes& a, const MatchedEpisodes& b) {
    return opening_of(a) < opening_of(b);
  });
  return matched;
}

}  // namespace agreed
