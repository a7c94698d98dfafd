#pragma once
// Proving that nothing in the journal was changed: every batch's SHA-256 worked out again from its rows.
#include <cstdint>
#include <filesystem>
#include <string>
#include <vector>

#include "daemon/journal/journal.hpp"

namespace agreed {

struct JournalProof {
  std::int64_t batches = 0, rows = 0;
  ChainHead head;  ///< compare it with a copy kept elsewhere: a cut-off tail shows only there
  std::vector<std::string> faults;  ///< in words, at most 20; empty: nothing was changed or is missing
};

/// Reads the whole journal through a read-only connection, so it may run while the service does. Checks the
/// database's own structure, that batches follow each other without a gap, and the hash of each. Throws
/// JournalError when the journal cannot be read at all.
[[nodiscard]] JournalProof verify_journal(const std::filesystem::path& folder);

}  // namespace agreed
