#include "daemon/journal/backup.hpp"

#include <system_error>

#include <unistd.h>

#include "daemon/journal/connection.hpp"
#include "daemon/journal/durable.hpp"
#include "daemon/journal/schema.hpp"

namespace agreed {
namespace {

namespace fs = std::filesystem;
using journal::with_suffix;

/// A whole, lasting copy of the journal `from` at `to`, which must not exist, for those who may read `like`;
/// nothing is left there if it fails.
void copy_journal(const fs::path& from, const fs::path& to, const fs::path& like) {
  try {
    journal::translating(from, [&] {
      const auto database = journal::open_reader(from);
      journal::check_usable(*database, from);
      journal::copy_database(*database, to, like);
    });
  } catch (...) {
    std::error_code ignored;
    for (const char* suffix : {"", "-journal"}) fs::remove(with_suffix(to, suffix), ignored);
    throw;
  }
}

/// Where a backup grows: beside its target, hidden, and of this process alone.
fs::path unfinished(const fs::path& target) {
  const std::string name =
      "." + target.filename().string() + "." + std::to_string(::getpid()) + ".unfinished";
  return target.parent_path() / name;
}

/// A name under which neither a journal nor its log is in the way. A log without its journal is no obstacle
/// if there is no log to keep now: an interrupted restore has kept it there.
fs::path name_to_keep(const fs::path& folder, bool with_log) {
  for (int i = 0;; ++i) {
    const std::string number = i == 0 ? "" : "." + std::to_string(i);
    fs::path name = folder / ("journal.replaced" + number + ".sqlite");
    if (!fs::exists(name) && !(with_log && fs::exists(with_suffix(name, "-wal")))) return name;
  }
}

/// The log goes first: a journal beside the log of another would be worse than one without.
fs::path set_aside(const fs::path& file) {
  const fs::path log = with_suffix(file, "-wal");
  const bool has_log = fs::exists(log);
  fs::path kept = name_to_keep(file.parent_path(), has_log);
  if (has_log) fs::rename(log, with_suffix(kept, "-wal"));
  fs::remove(with_suffix(file, "-shm"));
  if (!fs::exists(file)) return {};
  fs::rename(file, kept);
  return kept;
}

}  // namespace

JournalProof backup_journal(const fs::path& folder, const fs::path& target) {
  if (fs::exists(fs::symlink_status(target)))
    throw JournalError(target.string() + " is there already and is not overwritten. Name another file.",
                       false);
  const fs::path whole = fs::absolute(target), part = unfinished(whole);
  return journal::translating(target, [&] {
    journal::remove_unfinished(part);
    copy_journal(journal::database_file(folder), part, journal::database_file(folder));
    journal::rename_to_free(part, whole);
    journal::make_lasting(whole.parent_path());
    return verify_database(whole);
  });
}

Restored restore_journal(const fs::path& folder, const fs::path& backup) {
  if (!fs::exists(backup)) throw JournalError("There is no backup " + backup.string() + ".", false);
  const StateLock lock(folder);
  const fs::path file = journal::database_file(folder);
  return journal::translating(file, [&] {
    Restored restored{verify_database(backup), {}};
    if (!restored.proof.faults.empty()) return restored;
    const fs::path fresh = with_suffix(file, ".new"), next = journal::restoring_file(file);
    journal::remove_unfinished(fresh);
    copy_journal(backup, fresh, fs::exists(file) ? file : backup);
    // From here until the last rename the service refuses to start: it would find a journal without its log,
    // or none.
    fs::rename(fresh, next);
    journal::make_lasting(folder);
    restored.kept = set_aside(file);
    journal::make_lasting(folder);
    fs::rename(next, file);
    journal::make_lasting(folder);
    return restored;
  });
}

}  // namespace agreed
