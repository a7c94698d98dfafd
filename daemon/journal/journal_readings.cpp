// What becomes of a reading (accepted, repeated, a conflict, a correction) and of a void.
#include <algorithm>
#include <bit>
#include <cmath>

#include "daemon/journal/journal_impl.hpp"

namespace agreed {
namespace {

using journal::Query;
using journal::Store;
using journal::Table;

struct Key {
  std::int64_t analyzer, measurand;
  StoredKind kind;
  const JournalReading& reading;
};

struct Revision {
  std::int64_t number = 0;
  double value = 0;
  int censored = 0;
  bool voided = false;
  std::int64_t file = 0, line = 0, batch = 0;

  /// The same double, bit for bit: a value that was only nearly the same is another value.
  [[nodiscard]] bool says(double other, int other_censored) const {
    return std::bit_cast<std::uint64_t>(value) == std::bit_cast<std::uint64_t>(other) &&
           censored == other_censored;
  }
};

constexpr const char* kRevisions =
    "SELECT r.revision, r.value, r.censored, EXISTS (SELECT 1 FROM voids v WHERE v.analyzer = r.analyzer AND "
    "v.kind = r.kind AND v.measurand = r.measurand AND v.item = r.item AND v.measured_at = r.measured_at AND "
    "v.replicate = r.replicate AND v.revision = r.revision), r.file, r.line, r.batch FROM readings r WHERE "
    "r.analyzer = ? AND "
    "r.kind = ? AND r.measurand = ? AND r.item = ? AND r.measured_at = ? AND r.replicate = ? "
    "ORDER BY r.revision DESC";

// The same line read another time: of the same content (after a crash between two batches of a file, or
// because it had rejected rows and was given again), or of a file that has grown since.
constexpr const char* kSameVoid =
    "SELECT 1 FROM voids v JOIN files f ON f.id = v.file JOIN files g ON g.id = ? WHERE v.analyzer = ? AND "
    "v.kind = ? AND v.measurand = ? AND v.item = ? AND v.measured_at = ? AND v.replicate = ? AND "
    "v.line = ? AND (f.id <> g.id OR v.batch < ?) AND f.analyzer = g.analyzer AND "
    "(f.sha256 = g.sha256 OR (f.name = g.name AND f.size < g.size)) LIMIT 1";

void bind_key(SQLite::Statement& statement, const Key& key, int first) {
  statement.bind(first, key.analyzer);
  statement.bind(first + 1, static_cast<int>(key.kind));
  statement.bind(first + 2, key.measurand);
  statement.bind(first + 3, std::string(key.reading.item));
  statement.bind(first + 4, journal::milliseconds(key.reading.measured_at));
  statement.bind(first + 5, key.reading.replicate);
}

/// All that was ever stored under the key, newest first.
std::vector<Revision> revisions_of(Store& store, const Key& key) {
  std::vector<Revision> found;
  Query rows = store.query(kRevisions);
  bind_key(*rows, key, 1);
  while (rows->executeStep())
    found.push_back({rows->getColumn(0).getInt64(), rows->getColumn(1).getDouble(),
                     rows->getColumn(2).getInt(), rows->getColumn(3).getInt() != 0,
                     rows->getColumn(4).getInt64(), rows->getColumn(5).getInt64(),
                     rows->getColumn(6).getInt64()});
  return found;
}

bool void_was_read_before(Store& store, std::int64_t file, const Key& key) {
  Query rows = store.query(kSameVoid);
  rows->bind(1, file);
  bind_key(*rows, key, 2);
  rows->bind(8, key.reading.line);
  rows->bind(9, store.open_batch());
  return rows->executeStep();
}

void start_key(Store& store, Table table, const Key& key, std::int64_t revision) {
  store.history.start(table)
      .name(key.analyzer, store.names.text_of(key.analyzer))
      .integer(static_cast<std::int64_t>(key.kind))
      .name(key.measurand, store.names.text_of(key.measurand))
      .text(key.reading.item)
      .time(key.reading.measured_at)
      .integer(key.reading.replicate)
      .integer(revision);
}

/// False if the key and revision are stored already.
bool insert_reading(Store& store, std::int64_t file, const Key& key, std::int64_t revision, double value) {
  const JournalReading& r = key.reading;
  start_key(store, Table::readings, key, revision);
  const bool inserted = store.history.real(value)
                            .integer(r.censored)
                            .integer(file)
                            .integer(r.line)
                            .text(r.by)
                            .text(r.note)
                            .integer(r.clock_ambiguous ? 1 : 0)
                            .insert()
                            .has_value();
  if (inserted) store.tallies.accept(file, key.analyzer, r.measured_at, r.censored != 0);
  return inserted;
}

JournalRowResult judge_known(Store& store, std::int64_t file, const Key& key, double value) {
  const auto known = revisions_of(store, key);
  const Revision& newest = known.front();
  const auto says = [&](const Revision& r) { return r.says(value, key.reading.censored); };
  // While a correction stands, what it corrected is known too: a file read again from its start brings both.
  const bool repeated = newest.voided ? says(newest) : std::any_of(known.begin(), known.end(), says);
  if (repeated) {
    // The very row: its file was begun, not finished, and is gone through again. It came once.
    const bool same_row = std::any_of(known.begin(), known.end(), [&](const Revision& r) {
      return says(r) && r.file == file && r.line == key.reading.line && r.batch < store.open_batch();
    });
    if (!same_row) store.tallies.repeat(file, key.analyzer);
    return {RowOutcome::repeated, newest.value};
  }
  if (!newest.voided) return {RowOutcome::conflict, newest.value};
  insert_reading(store, file, key, newest.number + 1, value);
  return {RowOutcome::accepted, value};
}

/// True if something stood under the key and is now taken back.
bool take_back(Store& store, std::int64_t file, const Key& key) {
  const auto known = revisions_of(store, key);
  if (known.empty() || known.front().voided || void_was_read_before(store, file, key)) return false;
  start_key(store, Table::voids, key, known.front().number);
  store.history.integer(file).integer(key.reading.line).text(key.reading.by).text(key.reading.note).insert();
  store.tallies.take_back(file, key.analyzer);
  return true;
}

std::optional<Key> find_key(Store& store, const JournalReading& reading, StoredKind kind) {
  const auto analyzer = store.names.find(reading.analyzer), measurand = store.names.find(reading.measurand);
  if (!analyzer || !measurand) return std::nullopt;
  return Key{*analyzer, *measurand, kind, reading};
}

}  // namespace

JournalRowResult Journal::add_reading(std::int64_t file, const JournalReading& reading) {
  return impl_->in_open_batch([&]() -> JournalRowResult {
    if (!std::isfinite(reading.value))
      throw JournalError("A reading of " + std::string(reading.item) + " is not a number (a fault of ours)",
                         false);
    const Key key{impl_->names.id_of(reading.analyzer), impl_->names.id_of(reading.measurand), reading.kind,
                  reading};
    // SQLite stores -0.0 as 0.0; made so beforehand, the row and its canonical text are the same.
    const double value = reading.value + 0.0;
    if (insert_reading(*impl_, file, key, 0, value)) return {RowOutcome::accepted, value};
    return judge_known(*impl_, file, key, value);
  });
}

std::vector<VoidedReading> Journal::add_void(std::int64_t file, const JournalReading& reading) {
  return impl_->in_open_batch([&] {
    std::vector<VoidedReading> voided;
    for (const StoredKind kind : {StoredKind::check, StoredKind::split}) {
      const auto key = find_key(*impl_, reading, kind);
      if (!key || !take_back(*impl_, file, *key)) continue;
      voided.push_back({std::string(reading.analyzer), std::string(reading.measurand),
                        std::string(reading.item), kind, reading.measured_at});
    }
    return voided;
  });
}

bool Journal::was_voided(const JournalReading& reading) {
  return impl_->in_open_batch([&] {
    for (const StoredKind kind : {StoredKind::check, StoredKind::split}) {
      const auto key = find_key(*impl_, reading, kind);
      if (!key) continue;
      const auto known = revisions_of(*impl_, *key);
      if (std::any_of(known.begin(), known.end(), [](const Revision& r) { return r.voided; })) return true;
    }
    return false;
  });
}

}  // namespace agreed
