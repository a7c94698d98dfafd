#pragma once
// A consistent copy of the journal, and putting one back.
#include <filesystem>

#include "daemon/journal/journal.hpp"

namespace agreed {

/// Copies the journal of `folder` to `target`, also while the service runs. The target appears whole or not
/// at all; an existing one is not overwritten. Throws JournalError.
void backup_journal(const std::filesystem::path& folder, const std::filesystem::path& target);

/// Puts `backup` in the place of the journal of `folder`, holding the folder's lock meanwhile. What was there
/// is kept beside it; returns its name (journal.replaced.sqlite, journal.replaced.1.sqlite, ...), empty if
/// there was nothing. Throws JournalError, also when a service runs or the backup is no usable journal; then
/// nothing was changed.
std::filesystem::path restore_journal(const std::filesystem::path& folder,
                                      const std::filesystem::path& backup);

}  // namespace agreed
