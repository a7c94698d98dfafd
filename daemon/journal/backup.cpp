#include "daemon/journal/backup.hpp"

#include "daemon/journal/connection.hpp"
#include "daemon/journal/durable.hpp"
#include "daemon/journal/schema.hpp"

namespace agreed {
namespace {

namespace fs = std::filesystem;
using journal::with_suffix;

/// A whole, lasting copy of the journal `from` at `to`, which must not exist.
void copy_journal(const fs::path& from, const fs::path& to) {
  journal::remove_unfinished(to);
  journal::translating(from, [&] {
    const auto database = journal::open_reader(from);
    journal::check_usable(*database, from);
    journal::copy_database(*database, to);
  });
}

/// The log goes first: a journal beside the log of another would be worse than one without.
fs::path set_aside(const fs::path& file) {
  fs::path kept = journal::free_name(file.parent_path() / "journal.replaced", ".sqlite");
  const fs::path log = with_suffix(file, "-wal");
  if (fs::exists(log)) fs::rename(log, with_suffix(kept, "-wal"));
  fs::remove(with_suffix(file, "-shm"));
  if (!fs::exists(file)) return {};
  fs::rename(file, kept);
  return kept;
}

}  // namespace

void backup_journal(const fs::path& folder, const fs::path& target) {
  if (fs::exists(target))
    throw JournalError(target.string() + " is there already and is not overwritten. Name another file.",
                       false);
  journal::translating(target, [&] {
    const fs::path part = with_suffix(target, ".part");
    copy_journal(journal::database_file(folder), part);
    fs::rename(part, target);
    journal::make_lasting(fs::absolute(target).parent_path());
  });
}

fs::path restore_journal(const fs::path& folder, const fs::path& backup) {
  if (!fs::exists(backup)) throw JournalError("There is no backup " + backup.string() + ".", false);
  const StateLock lock(folder);
  const fs::path file = journal::database_file(folder);
  return journal::translating(file, [&] {
    const fs::path fresh = with_suffix(file, ".new");
    copy_journal(backup, fresh);
    fs::path kept = set_aside(file);
    fs::rename(fresh, file);
    journal::make_lasting(folder);
    return kept;
  });
}

}  // namespace agreed
