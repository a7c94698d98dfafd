#pragma once
// Proving that nothing in the journal was changed: every batch's SHA-256 worked out again from its rows.
#include <cstdint>
#include <filesystem>
#include <span>
#include <string>
#include <vector>

#include "daemon/journal/journal.hpp"

namespace agreed {

struct JournalProof {
  std::int64_t batches = 0, rows = 0;
  ChainHead head;  ///< keep a copy elsewhere: a cut-off or rewritten tail shows only against that
  std::vector<ChainHead> not_found;  ///< of the heads kept elsewhere: those that are not in the chain
  std::vector<std::string> faults;   ///< in words, at most 20; empty: nothing was changed or is missing
};

/// The journal's file in the state folder `folder`.
[[nodiscard]] std::filesystem::path database_of(const std::filesystem::path& folder);

/// Reads the whole journal `database` through a read-only connection, so it may run while the service does.
/// Checks the database's own structure and foreign keys, that batches follow each other without a gap, the
/// hash of each, that the outbox follows from the history, and that each head of `kept` (noted elsewhere at
/// some time) is still in the chain. A damaged file is a fault; throws JournalError when it cannot be read
/// for another reason.
[[nodiscard]] JournalProof verify_database(const std::filesystem::path& database,
                                           std::span<const ChainHead> kept = {});

/// The same of the journal in the state folder `folder`.
[[nodiscard]] JournalProof verify_journal(const std::filesystem::path& folder,
                                          std::span<const ChainHead> kept = {});

}  // namespace agreed
