#pragma once
// A consistent copy of the journal, and putting one back.
#include <filesystem>

#include "daemon/journal/journal.hpp"
#include "daemon/journal/verify.hpp"

namespace agreed {

/// Copies the journal of `folder` to `target`, also while the service runs. The target appears whole,
/// lasting, or not at all; an existing one is not overwritten. Who may not read the journal may not read the
/// copy: it has the journal's permissions, less what the umask takes away. What the finished copy proves to
/// be: a copy of a journal with faults has them too. Throws JournalError.
JournalProof backup_journal(const std::filesystem::path& folder, const std::filesystem::path& target);

struct Restored {
  JournalProof proof;  ///< of the backup
  /// Where what was there is kept: journal.replaced.sqlite, journal.replaced.1.sqlite, ...; empty if nothing
  /// was.
  std::filesystem::path kept;
};

/// Puts `backup` in the place of the journal of `folder`, holding the folder's lock meanwhile; nothing is
/// deleted. Its permissions are those of what it replaces, or else of the backup, less what the umask takes
/// away. Throws JournalError, also when a service runs or the backup is no usable journal; then nothing
/// was changed. With faults in the proof nothing was changed either.
[[nodiscard]] Restored restore_journal(const std::filesystem::path& folder,
                                       const std::filesystem::path& backup);

}  // namespace agreed
