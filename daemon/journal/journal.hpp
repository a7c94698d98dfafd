#pragma once
// The journal: everything that came in and everything concluded from it, append-only, in SQLite. Nothing
// outside this folder knows SQL. Journal is the only read-write connection and belongs to the engine thread;
// JournalReader opens read-only connections, one per thread.
#include <cstdint>
#include <filesystem>
#include <functional>
#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "daemon/journal/journal_reader.hpp"
#include "daemon/journal/journal_types.hpp"
#include "daemon/journal/state_lock.hpp"

namespace agreed {

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

  /// To be called between batches: writes a long write-ahead log back into the file, while `something_waits`
  /// only a very long one. What fails is tried again later.
  void write_back(bool something_waits) noexcept;
  /// How long the write-ahead log has become that cannot be written back, because somebody reads the journal
  /// without end; nothing while it is as long as it may be.
  [[nodiscard]] std::optional<std::int64_t> overlong_log_bytes() const;
  /// Gives back what the database keeps in memory, after much was read that is not needed again.
  void release_memory() noexcept;
  /// To be called after a failed batch, before anything is read: if a write or a sync went wrong, what the
  /// connection holds in memory is not trusted, and the database is opened anew. It must be the same journal,
  /// with nothing of what was committed missing; throws JournalError.
  void recover();

  /// The file's row id if `analyzer` gave this content before and it was read without a rejected row.
  [[nodiscard]] bool knows_content(std::string_view analyzer, std::string_view sha256);
  /// The same file (analyzer, name, content) if it was begun and not finished: after a crash between two
  /// of its batches it is gone through again under that id. Also if it was finished and has the same mtime:
  /// after a crash between its last commit and its move. A rejected one only if it was not renamed since: one
  /// that somebody moved back from rejected/ is a new file.
  [[nodiscard]] std::optional<BegunFile> begun_file(const JournalFile& file);
  /// Begins a file; `outcome` is set by finish_file in this batch or a later one.
  std::int64_t add_file(const JournalFile& file);
  /// outcome: done, repeated, rejected, or kGrownOutcome. `reason` for rejected.
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
  /// The one that is known under the key of `like` (analyzer, standard, measurand, kind, at); within the open
  /// batch its rows are seen.
  [[nodiscard]] std::optional<JournalIntervention> find_intervention(const JournalIntervention& like);
  void add_rejected_row(std::int64_t file, std::uint32_t line, std::uint32_t column, std::string_view text,
                        std::string_view reason);
  void add_finding(Instant at, std::string_view kind, std::string_view subject, std::string_view body);
  void add_transition(const StoredTransition& transition);
  std::int64_t add_message(const OutboxMessage& message);
  void add_try(const DeliveryTry& attempt);
  /// Whether this route was sent anything of this alert since then.
  [[nodiscard]] bool has_message(std::int64_t alert, std::string_view route, Instant since);
  /// The newest message of this type to this route.
  [[nodiscard]] std::optional<LastMessage> last_message(std::string_view route, std::string_view type);
  /// While the newest try to this route was in vain.
  [[nodiscard]] std::optional<FailingDelivery> failing(std::string_view route);
  /// Where the message with that webhook-id goes, and whether it can be sent again: it can, unless it is
  /// unknown or waits to be sent anyway.
  [[nodiscard]] AskedAgain ask_again(std::string_view webhook_id);
  /// Makes a message due again if that can be; its tries are counted anew, so it is not given up at the first
  /// failure.
  AskedAgain send_again(std::string_view webhook_id, Instant due_at);
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
  /// Every result of a split sample that was taken in after `since`, whatever became of it, oldest first.
  void each_split_received(
      Instant since, const std::function<void(std::string_view analyzer, std::string_view measurand,
                                              std::string_view sample, Instant, Instant received)>& take);
  /// When the newest batch was committed; nothing when there is none.
  [[nodiscard]] std::optional<Instant> last_commit();
  /// Standing censored results of a check standard: what `each_check` leaves out.
  [[nodiscard]] std::int64_t censored_checks(std::string_view analyzer, std::string_view item,
                                             std::string_view measurand);
  [[nodiscard]] std::vector<JournalIntervention> interventions();  ///< by time
  [[nodiscard]] std::vector<StoredTransition> last_transitions();
  /// Of the newest configuration recorded; empty when there is none.
  [[nodiscard]] std::string last_configuration_sha256();
  /// Since when the newest recorded one is in force, over restarts and reloads that did not change it.
  [[nodiscard]] std::optional<Instant> last_configuration_since();
  /// Of the analyzer's newest accepted reading.
  [[nodiscard]] std::optional<Instant> last_measured(std::string_view analyzer);

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace agreed
