#pragma once
// The alerts of a replay beside those raised then: each from its opening to its end, and which of one side is
// the same matter as which of the other.
#include <optional>
#include <string>
#include <vector>

#include "core/alert/alert.hpp"

namespace agreed {

/// One step of an alert as the readings tell it. `at`: when the reading that led to it was measured; where
/// that is not known, by our clock.
struct EpisodeStep {
  AlertChange change{};
  Instant at{};
  Severity severity{};
};

/// An alert from its opening to its end. An alert that opens again under the same id is another one.
struct AlertEpisode {
  AlertKind kind{};
  Subject subject;
  Severity severity{};                ///< the worst it came to
  std::string title;                  ///< as last told
  std::optional<Instant> started_at;  ///< the estimated start of what is wrong, as last told
  std::vector<EpisodeStep> steps;     ///< the opening, each rise of the severity, acknowledged, the end
  std::optional<Instant> ended_at;
  std::string resolved_reason;

  [[nodiscard]] Instant opened_at() const { return steps.front().at; }
};

/// Whether a replay can raise alerts of this kind: those of files, folders, the disk and the endpoints it
/// cannot.
[[nodiscard]] bool is_replayed(AlertKind kind);

/// Puts transitions, given in their order, together to episodes.
class Episodes {
 public:
  /// `at` as in EpisodeStep.
  void add(const AlertTransition& transition, Instant at);
  /// In the order of their openings.
  [[nodiscard]] std::vector<AlertEpisode> take();

 private:
  struct Known {
    std::int64_t alert = 0;
    AlertEpisode episode;
  };
  std::vector<Known> all_;
  std::vector<std::size_t> open_;  ///< places in `all_`
};

/// The same matter on both sides, or on one only; at least one is there.
struct MatchedEpisodes {
  std::optional<AlertEpisode> now, then;
};

/// Two episodes of the same kind and subject are the same matter if their times, from opening to end, overlap
/// or come within `near` of each other; each has at most one partner, the first that fits. By opening.
[[nodiscard]] std::vector<MatchedEpisodes> match_episodes(std::vector<AlertEpisode> now,
                                                          std::vector<AlertEpisode> then, Duration near);

}  // namespace agreed
