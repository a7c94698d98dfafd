#pragma once
// Where the HTTP side finds alerts: the journal, or a test.
#include <filesystem>
#include <functional>
#include <optional>
#include <vector>

#include "daemon/journal/journal.hpp"

namespace agreed {

/// All may throw (JournalError) and are called from several threads at once.
struct AlertSource {
  std::function<std::vector<AlertRecord>(const AlertQuery&)> alerts;
  std::function<std::optional<AlertRecord>(std::int64_t id)> alert;
  std::function<std::vector<MessageCount>()> messages = [] { return std::vector<MessageCount>(); };
};

/// Reads the journal in `state` over one read-only connection, opened at the first question and opened anew
/// after a failure.
[[nodiscard]] AlertSource journal_alerts(std::filesystem::path state);

}  // namespace agreed
