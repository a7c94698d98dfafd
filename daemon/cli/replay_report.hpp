#pragma once
// What a replay has to tell, for people and for programs.
#include <optional>
#include <string>
#include <vector>

#include "core/replay/episodes.hpp"
#include "daemon/cli/past.hpp"

namespace agreed {

struct ReplayReport {
  Past past;                          ///< its events may be gone
  std::string config;                 ///< the configuration file
  std::optional<Period> asked;        ///< --between
  Period readings{};                  ///< time of the first and the last event replayed
  std::int64_t readings_between = 0;  ///< of --between; without it all
  std::vector<MatchedEpisodes> alerts;
};

/// Lines of at most 80 columns, ids and paths longer than that aside.
[[nodiscard]] std::string replay_text(const ReplayReport& report);
[[nodiscard]] std::string replay_json(const ReplayReport& report);

}  // namespace agreed
