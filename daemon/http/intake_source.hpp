#pragma once
// Where the HTTP side finds what came in: the journal, or a test.
#include <filesystem>
#include <functional>
#include <vector>

#include "daemon/journal/journal.hpp"

namespace agreed {

/// All may throw (JournalError) and are called from several threads at once.
struct IntakeSource {
  std::function<std::vector<FileRow>(const FileQuery&)> files;
  std::function<std::vector<ReadingRow>(const ReadingQuery&)> readings;
};

/// Reads the journal in `state` over a read-only connection of its own: a long look at the readings holds up
/// neither the engine nor who asks for alerts.
[[nodiscard]] IntakeSource journal_intake(std::filesystem::path state);

}  // namespace agreed
