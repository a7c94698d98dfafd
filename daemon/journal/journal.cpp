// Opening the journal, and the life of a batch.
#include "daemon/journal/journal.hpp"

#include "daemon/clock.hpp"
#include "daemon/journal/chain.hpp"
#include "daemon/journal/journal_impl.hpp"
#include "daemon/journal/schema.hpp"

namespace agreed::journal {
namespace {

// Of 4 KiB: 16 MiB of log are written back when nothing waits, 32 MiB in any case.
constexpr int kLogPages = 4000, kLongLogPages = 8000, kOverlongLogPages = 32000;
constexpr std::int64_t kPageBytes = 4096;

std::unique_ptr<SQLite::Database> open_and_migrate(const std::filesystem::path& file) {
  return translating(file, [&file] {
    create_if_missing(file, now_utc());
    auto database = open_writer(file);
    check_usable(*database, file);
    migrate(*database, file, migrations());
    return database;
  });
}

}  // namespace

Store::Store(const std::filesystem::path& folder)
    : file(database_file(folder)),
      database(open_and_migrate(file)),
      names(*database),
      history(*database),
      tallies(load_tallies(*database)) {
  load_identity();
  const auto note_pages = [](void* pages, sqlite3*, const char*, int in_log) {
    *static_cast<int*>(pages) = in_log;
    return SQLITE_OK;
  };
  sqlite3_wal_hook(database->getHandle(), note_pages, &log_pages);
}

void Store::load_identity() {
  SQLite::Statement meta(*database, "SELECT source, created_at FROM meta");
  meta.executeStep();
  source = meta.getColumn(0).getString();
  head.sha256 = chain_start(source, instant(meta.getColumn(1)));
  SQLite::Statement newest(*database, "SELECT sequence, sha256 FROM batches ORDER BY sequence DESC LIMIT 1");
  if (newest.executeStep()) head = {newest.getColumn(0).getInt64(), newest.getColumn(1).getString()};
}

bool Store::continues(const std::string& source_before, const ChainHead& head_before) {
  if (source != source_before) return false;
  if (head_before.sequence == 0) return true;
  Query then = query("SELECT sha256 FROM batches WHERE sequence = ?");
  then->bind(1, head_before.sequence);
  return then->executeStep() && then->getColumn(0).getString() == head_before.sha256;
}

// What is written to a file that was moved or deleted is gone with the process.
void Store::must_be_in_place() {
  int moved = 0;
  sqlite3_file_control(database->getHandle(), "main", SQLITE_FCNTL_HAS_MOVED, &moved);
  if (moved != 0)
    throw JournalError(
        "The journal " + file.string() +
            " was moved, deleted or replaced while the service ran. Results wait in the inboxes: put "
            "it back, or stop the service, restore a backup and start it again.",
        true);
}

void Store::begin(Instant at) {
  if (in_batch) {
    rollback();
    throw JournalError("A batch was begun inside another (a fault of ours)", false);
  }
  must_be_in_place();
  // IMMEDIATE: another writer is met here and waited for, not in the middle of the batch.
  try {
    database->exec("BEGIN IMMEDIATE");
  } catch (const SQLite::Exception& error) {
    doubtful = doubtful || is_disk_trouble(error);
    throw to_journal_error(error, file);
  }
  in_batch = true;
  now = at;
  committed = tallies;
  names.begin_batch();
  history.begin(head.sequence + 1, head.sha256, at);
}

void Store::commit() {
  in_open_batch([this] {
    write_arrivals();
    ChainHead next = head;
    if (!history.empty()) {
      next = {head.sequence + 1, history.finish()};
      write_batch(next);
    }
    database->exec("COMMIT");
    head = next;
    in_batch = false;
    tallies.arrivals.clear();
    tallies.took_in = false;
  });
}

void Store::write_arrivals() {
  for (const Arrival& a : tallies.arrivals) {
    std::optional<std::int64_t> newest;
    if (a.newest_measured_at) newest = milliseconds(*a.newest_measured_at);
    history.start(Table::arrivals)
        .integer(a.file)
        .name(a.analyzer, names.text_of(a.analyzer))
        .integer(a.accepted)
        .integer(a.repeated)
        .integer(a.rejected)
        .integer(a.voided)
        .integer(a.censored)
        .optional_integer(newest)
        .insert();
  }
  if (tallies.took_in) tallies.totals.last_commit_at = now;
}

void Store::write_batch(const ChainHead& next) {
  Query row = query("INSERT INTO batches VALUES(?, ?, ?, ?)");
  row->bind(1, next.sequence);
  row->bind(2, head.sha256);
  row->bind(3, next.sha256);
  row->bind(4, milliseconds(now));
  row->exec();
}

void Store::rollback() noexcept {
  // SQLite may have rolled back by itself (disk full); then a ROLLBACK of ours would be an error.
  if (sqlite3_get_autocommit(database->getHandle()) == 0) database->tryExec("ROLLBACK");
  if (!in_batch) return;
  in_batch = false;
  tallies = std::move(committed);
  names.forget_batch();
  history.forget_batch();
}

// A page that many batches touch is written back once. What cannot be written back now stays in the log.
void Store::write_back(bool something_waits) noexcept {
  if (log_pages < written_back) written_back = 0;  // the log began anew
  if (in_batch || log_pages - written_back < (something_waits ? kLongLogPages : kLogPages)) return;
  written_back = log_pages;
  sqlite3_wal_checkpoint_v2(database->getHandle(), nullptr, SQLITE_CHECKPOINT_PASSIVE, nullptr, nullptr);
}

Query Store::query(const char* sql) {
  auto& statement = queries_[sql];
  if (!statement) statement = std::make_unique<SQLite::Statement>(*database, sql);
  return Query(*statement);
}

}  // namespace agreed::journal

namespace agreed {

Journal::Journal(const std::filesystem::path& folder) {
  const auto file = journal::database_file(folder);
  journal::translating(file, [&] { impl_ = std::make_unique<Impl>(folder); });
}
Journal::~Journal() {
  impl_->rollback();
}

std::string Journal::source() const {
  return impl_->source;
}
IntakeTotals Journal::totals() const {
  return impl_->tallies.totals;
}
ChainHead Journal::head() const {
  return impl_->head;
}
void Journal::begin(Instant now) {
  impl_->begin(now);
}
void Journal::commit() {
  impl_->commit();
}
void Journal::rollback() noexcept {
  impl_->rollback();
}
void Journal::write_back(bool something_waits) noexcept {
  impl_->write_back(something_waits);
}
std::optional<std::int64_t> Journal::overlong_log_bytes() const {
  if (impl_->log_pages < journal::kOverlongLogPages) return std::nullopt;
  return impl_->log_pages * journal::kPageBytes;
}
void Journal::release_memory() noexcept {
  sqlite3_db_release_memory(impl_->database->getHandle());
}
void Journal::recover() {
  if (!impl_->doubtful) return;
  const auto file = impl_->file;
  journal::translating(file, [&] {
    if (!std::filesystem::exists(file))
      throw JournalError("The journal " + file.string() + " is gone.", true);
    // The old connection goes last: as long as one is open, what was not committed does not come back from
    // the log.
    auto fresh = std::make_unique<Impl>(file.parent_path());
    if (!fresh->continues(impl_->source, impl_->head))
      throw JournalError(
          "The journal " + file.string() +
              " is not the one that was open, or lacks what was committed. Stop the service and restore a "
              "backup with `agreed restore CONFIG FILE`.",
          false);
    impl_ = std::move(fresh);
  });
}

}  // namespace agreed
