#pragma once
// Files that must be whole after a power cut. Private to daemon/journal.
#include <filesystem>
#include <string_view>

namespace agreed::journal {

/// `file` with more at the end of its name.
[[nodiscard]] std::filesystem::path with_suffix(std::filesystem::path file, std::string_view suffix);

/// An empty file that nobody may read who may not read `like`: its permissions, less those that the umask
/// takes away, but for the owner always reading and writing. Throws std::filesystem::filesystem_error, also
/// if something is there already.
void make_empty(const std::filesystem::path& file, const std::filesystem::path& like);

/// Makes what was written to `path` (a file or a folder) last; throws JournalError. Never for a database that
/// is open in this process: closing it here would drop SQLite's locks.
void make_lasting(const std::filesystem::path& path);

/// Renames, but never onto something that is there; throws JournalError.
void rename_to_free(const std::filesystem::path& from, const std::filesystem::path& to);

/// Removes a database of ours that was never finished, with its side files.
void remove_unfinished(const std::filesystem::path& database);

/// `stem` + `ending` if that is free, else `stem`.1`ending`, `stem`.2`ending`, ...
[[nodiscard]] std::filesystem::path free_name(const std::filesystem::path& stem, std::string_view ending);

}  // namespace agreed::journal
