#pragma once
// Old readings for a replay: from a journal, or from a folder of drop files. Nothing is written or moved.
#include <cstdint>
#include <filesystem>
#include <string>
#include <vector>

#include "config/config.hpp"
#include "core/replay/episodes.hpp"
#include "core/replay/replay.hpp"

namespace agreed {

struct RejectedPast {
  std::string file;  ///< as in the folder
  std::uint32_t line = 0;
  std::string reason;
};

struct Past {
  std::filesystem::path from;
  bool is_journal = false;
  std::vector<Event> events;  ///< of what is configured, each key once, nothing taken back or censored
  std::int64_t readings = 0;  ///< of those events
  // Of a journal.
  std::vector<AlertEpisode> told;      ///< alerts raised then, of kinds that a replay can raise
  std::int64_t told_not_replayed = 0;  ///< alerts of other kinds
  std::vector<PastAcknowledgement> acknowledgements;
  // Of a folder.
  std::int64_t files = 0, repeated = 0, rejected = 0, censored = 0, taken_back = 0;
  std::vector<RejectedPast> first_rejected;  ///< at most 20
};

/// From a journal file, a state folder (it holds journal.sqlite) or a folder of drop files. Throws
/// JournalError or std::runtime_error in words for people.
[[nodiscard]] Past read_past(const Config& config, const std::filesystem::path& from);

/// Each file of `folder`/ANALYZER and below, in the order of their names, read as that analyzer's drop files
/// are; hidden and unfinished files, reasons written by the service and `rejected` folders are passed over.
/// The first of two different results under one key stands, the other is rejected.
[[nodiscard]] Past read_past_folder(const Config& config, const std::filesystem::path& folder);

}  // namespace agreed
