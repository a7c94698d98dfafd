#pragma once
// The journal: everything that came in and everything concluded from it, append-only, in SQLite. Nothing
// outside this folder knows SQL. Journal is the only read-write connection and belongs to the engine thread;
// JournalReader opens read-only connections, one per thread.
#include <cstdint>
#include <filesystem>
#include <functional>
#include <memory>
#include <optional>
#include <stdexcept>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/event.hpp"
#include "core/base/instant.hpp"

namespace agreed {

/// The journal cannot be used or a batch could not be written; what() is for people. `retry`: the cause may
/// go away by itself (disk full, locked), so keep the work and try again.
class JournalError : public std::runtime_error {
 public:
  JournalError(const std::string& what, bool retry_later) : std::runtime_error(what), retry(retry_later) {}
  bool retry;
};

enum class StoredKind : std::uint8_t { check = 0, split = 1 };

/// A reading by names, as the journal keys it.
struct JournalReading {
  std::string_view analyzer, measurand, item;
  StoredKind kind = StoredKind::check;
  Instant measured_at{};
  std::int32_t replicate = 0;
  double value = 0;
  int censored = 0;  ///< 0 none, -1 below `value`, +1 above
  std::uint32_t line = 0;
  std::string_view by, note;
  bool clock_ambiguous = false;
};

enum class RowOutcome { accepted, repeated, conflict };

struct JournalRowResult {
  RowOutcome outcome = RowOutcome::accepted;
  double stored_value = 0;  ///< for conflict: what stands
};

/// A reading a void took back.
struct VoidedReading {
  std::string analyzer, measurand, item;
  StoredKind kind{};
  Instant measured_at{};
};

struct JournalIntervention {
  std::int64_t id = 0;
  std::string analyzer, standard, measurand;  ///< empty: all
  std::string kind, by, note;
  Instant at{};
};

struct JournalFile {
  std::string analyzer, name, sha256;
  std::uint64_t size = 0;
  std::int64_t mtime_ns = 0;
};

/// Totals of the journal, as `intake` of /api/status shows them.
struct IntakeTotals {
  std::int64_t files_done = 0, files_repeated = 0, files_rejected = 0;
  std::int64_t readings_accepted = 0, readings_repeated = 0, readings_rejected = 0, readings_voided = 0,
               readings_censored = 0;
  std::optional<Instant> last_commit_at;
  bool operator==(const IntakeTotals&) const = default;
};

struct ChainHead {
  std::int64_t sequence = 0;
  std::string sha256;  ///< hex
};

/// A message in the outbox.
struct OutboxMessage {
  std::int64_t id = 0;
  std::string webhook_id, route, type, body;
  std::int64_t alert = 0;  ///< 0: none (heartbeat, test)
  Instant created_at{}, due_at{};
  int tries = 0;
};

/// One try to deliver a message and what became of it.
struct DeliveryTry {
  std::int64_t message = 0;
  Instant at{};
  int status = 0;     ///< HTTP status; 0 = none came
  std::string error;  ///< in words; empty on success
  bool delivered = false;
  bool given_up = false;            ///< undeliverable
  std::optional<Instant> next_due;  ///< when neither
};

/// The newest transition of an alert, as the book is restored from.
struct StoredTransition {
  std::int64_t alert = 0;
  Instant at{};
  std::string change, body;  ///< body: JSON written by the renderer
};

class Journal {
 public:
  /// Creates or opens `folder`/journal.sqlite and migrates it; throws JournalError.
  explicit Journal(const std::filesystem::path& folder);
  ~Journal();
  Journal(const Journal&) = delete;
  Journal& operator=(const Journal&) = delete;

  /// A urn:uuid made when the journal was created: the source of all messages.
  [[nodiscard]] std::string source() const;
  [[nodiscard]] IntakeTotals totals() const;  ///< kept in memory, includes the open batch
  [[nodiscard]] ChainHead head() const;       ///< of the last committed batch

  // One batch: begin, any of the add/set calls, commit. All throw JournalError; after one the batch is gone
  // (rolled back), whatever SQLite thinks.
  void begin(Instant now);
  void commit();
  void rollback() noexcept;

  /// The file's row id if `analyzer` gave this content before and it was read without a rejected row.
  [[nodiscard]] bool knows_content(std::string_view analyzer, std::string_view sha256);
  /// Begins a file; `outcome` is set by finish_file in this batch or a later one.
  std::int64_t add_file(const JournalFile& file);
  /// outcome: done, repeated or rejected. `reason` for rejected.
  void finish_file(std::int64_t file, std::string_view outcome, std::string_view reason);
  JournalRowResult add_reading(std::int64_t file, const JournalReading& reading);
  /// Takes back what matches (analyzer, measurand, item, measured_at, replicate) whatever the kind; empty if
  /// nothing stands there. Repeating a void is harmless.
  std::vector<VoidedReading> add_void(std::int64_t file, const JournalReading& key);
  /// True if a reading of that key was ever taken back: tells a void that is repeated from one that is
  /// mistaken.
  [[nodiscard]] bool was_voided(const JournalReading& key);
  /// False if the same one (analyzer, standard, measurand, kind, at) is known. `file` 0: it came by another
  /// way.
  bool add_intervention(std::int64_t file, const JournalIntervention& intervention);
  void add_rejected_row(std::int64_t file, std::uint32_t line, std::uint32_t column, std::string_view text,
                        std::string_view reason);
  void add_finding(Instant at, std::string_view kind, std::string_view subject, std::string_view body);
  void add_transition(const StoredTransition& transition);
  std::int64_t add_message(const OutboxMessage& message);
  void add_try(const DeliveryTry& attempt);
  /// Makes a message due again, whatever became of it; false if there is none with that webhook-id.
  bool send_again(std::string_view webhook_id, Instant due_at);
  void add_configuration(std::string_view text, std::string_view sha256, Instant at);

  // Reading forward, voided and censored readings left out; within the open batch its rows are seen.
  void each_check(
      std::string_view analyzer, std::string_view item, std::string_view measurand,
      const std::function<void(Instant, std::int32_t replicate, double value)>& take);  ///< by time
  void each_split(std::string_view analyzer, std::string_view measurand,
                  const std::function<void(std::string_view sample, Instant, std::int32_t replicate,
                                           double value)>& take);  ///< by sample, time
  void each_split_of(std::string_view analyzer, std::string_view measurand, std::string_view sample,
                     const std::function<void(Instant, std::int32_t replicate, double value)>& take);
  [[nodiscard]] std::vector<JournalIntervention> interventions();  ///< by time
  [[nodiscard]] std::vector<StoredTransition> last_transitions();
  /// Of the newest configuration recorded; empty when there is none.
  [[nodiscard]] std::string last_configuration_sha256();
  /// received_at of the newest row per analyzer.
  [[nodiscard]] std::optional<Instant> last_received(std::string_view analyzer);
  [[nodiscard]] std::optional<Instant> last_measured(std::string_view analyzer);

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

struct AlertQuery {
  std::vector<std::string> states;  ///< empty: all
  std::optional<Instant> since;     ///< changed at or after
  int limit = 100;
  std::int64_t before_id = 0;  ///< cursor: ids below it; 0 = from the newest
};

struct DeliveryRow {
  std::string message, route, type, state;  ///< state: waiting, delivered, undeliverable
  Instant created_at{};
  std::optional<Instant> delivered_at, next_try_at;
  int tries = 0, last_status = 0;
  std::string last_error;
};

/// An alert with its whole record.
struct AlertRecord {
  std::string body;  ///< newest transition's JSON
  std::vector<StoredTransition> history;
  std::vector<DeliveryRow> deliveries;
};

struct RejectedRow {
  std::int64_t file = 0;
  std::uint32_t line = 0, column = 0;
  std::string text, reason;
};

struct FileRow {
  std::int64_t id = 0;
  std::string analyzer, name, sha256, outcome, reason;
  Instant received_at{};
  std::int64_t accepted = 0, repeated = 0, rejected = 0;
  std::vector<RejectedRow> rejected_rows;  ///< at most 20
};

/// One stored reading, also a voided or censored one.
struct ReadingRow {
  std::string analyzer, measurand, item;
  StoredKind kind{};
  Instant measured_at{}, received_at{};
  std::int32_t replicate = 0;
  std::int64_t revision = 0;  ///< 0, or how many corrections came before
  double value = 0;
  int censored = 0;  ///< as in JournalReading
  bool voided = false, clock_ambiguous = false;
  std::int64_t file = 0;
  std::uint32_t line = 0;
  std::string by, note;
};

/// Which readings, a page at a time, in the order of the key: item, measured_at, replicate, revision.
struct ReadingQuery {
  std::string analyzer, measurand;  ///< both needed
  StoredKind kind{};
  std::string item;                 ///< empty: all
  std::optional<Instant> from, to;  ///< measured_at, from <= at < to
  int limit = 100;
  std::optional<ReadingRow> after;  ///< the last row of the page before (its item, time, replicate, revision)
};

class JournalReader {
 public:
  explicit JournalReader(const std::filesystem::path& folder);
  ~JournalReader();
  JournalReader(JournalReader&&) noexcept;

  [[nodiscard]] std::vector<AlertRecord> alerts(const AlertQuery& query);
  [[nodiscard]] std::optional<AlertRecord> alert(std::int64_t id);
  /// The oldest undelivered, not given up message of `route`, whether due or not: order per route is kept.
  [[nodiscard]] std::optional<OutboxMessage> next_message(std::string_view route);
  [[nodiscard]] std::vector<FileRow> files(std::string_view outcome, int limit, std::int64_t before_id);
  [[nodiscard]] std::vector<ReadingRow> readings(const ReadingQuery& query);

  // As in Journal, as of the last commit; for replay and report.
  void each_check(std::string_view analyzer, std::string_view item, std::string_view measurand,
                  const std::function<void(Instant, std::int32_t replicate, double value)>& take);
  void each_split(std::string_view analyzer, std::string_view measurand,
                  const std::function<void(std::string_view sample, Instant, std::int32_t replicate,
                                           double value)>& take);
  [[nodiscard]] std::vector<JournalIntervention> interventions();

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

/// Holds the lock of a state folder; throws JournalError naming the other process if it is taken.
class StateLock {
 public:
  explicit StateLock(const std::filesystem::path& folder);
  ~StateLock();
  StateLock(const StateLock&) = delete;
  StateLock& operator=(const StateLock&) = delete;

 private:
  int descriptor_ = -1;
};

}  // namespace agreed
