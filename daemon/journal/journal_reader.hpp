#pragma once
// Read-only views of the journal for HTTP, the sender and the command line. One JournalReader is one
// connection: one per thread.
#include <cstdint>
#include <filesystem>
#include <functional>
#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "daemon/journal/journal_types.hpp"

namespace agreed {

struct JournalProof;

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

/// How many messages of a route are in a state (as in DeliveryRow).
struct MessageCount {
  std::string route, state;
  std::int64_t messages = 0;
};

/// An alert with its whole record.
struct AlertRecord {
  std::string body;  ///< newest transition's JSON
  std::vector<StoredTransition> history;
  std::vector<DeliveryRow> deliveries;
};

/// A configuration the service used from `at` on.
struct RecordedConfiguration {
  Instant at{};
  std::string sha256;
};

struct RejectedRow {
  std::int64_t file = 0;
  std::uint32_t line = 0, column = 0;
  std::string text, reason;
};

struct FileRow {
  std::int64_t id = 0;
  std::string analyzer, name, sha256, outcome, reason;
  std::int64_t size = 0;
  Instant received_at{};                ///< commit of its first batch
  std::optional<Instant> committed_at;  ///< commit of its last one; nothing while it is being taken in
  std::int64_t accepted = 0, repeated = 0, rejected = 0;
  std::vector<RejectedRow> rejected_rows;  ///< at most 20
};

/// Which files, a page at a time, newest first.
struct FileQuery {
  std::string outcome, analyzer;  ///< empty: all
  int limit = 100;
  std::int64_t before_id = 0;  ///< cursor: ids below it; 0 = from the newest
};

/// One stored reading, also a voided or censored one.
struct ReadingRow {
  std::string analyzer, measurand, item;
  StoredKind kind{};
  Instant measured_at{}, received_at{};
  std::int32_t replicate = 0;
  std::int64_t revision = 0;  ///< 0, or how many corrections came before
  double value = 0;
  int censored = 0;        ///< as in JournalReading
  bool voided = false;     ///< taken back
  bool corrected = false;  ///< and another stands in its place
  bool clock_ambiguous = false;
  std::int64_t file = 0;
  std::uint32_t line = 0;
  std::string by, note;
};

/// Which readings, a page at a time, in the order of the key: analyzer, kind, measurand, item, measured_at,
/// replicate, revision (analyzers and measurands in the order in which the journal met them).
struct ReadingQuery {
  std::string analyzer, measurand;  ///< empty: all
  std::optional<StoredKind> kind;
  std::string item;                 ///< empty: all
  std::optional<Instant> from, to;  ///< measured_at, from <= at < to
  int limit = 100;
  std::optional<ReadingRow> after;  ///< the last row of the page before (its key)
};

/// A step of an alert as it was told, and what led to it.
struct PastTransition {
  StoredTransition transition;
  /// The finding recorded just before it in the same batch; `kind` empty: none was.
  std::string finding_kind, finding_subject;
  Instant finding_at{};  ///< when what led to that finding was measured
};

class JournalReader {
 public:
  explicit JournalReader(const std::filesystem::path& folder);
  /// Of a file that is a journal, whatever its name: a backup, one that was put aside.
  [[nodiscard]] static JournalReader of_file(const std::filesystem::path& file);
  ~JournalReader();
  JournalReader(JournalReader&&) noexcept;

  [[nodiscard]] std::string source();  ///< as Journal::source
  [[nodiscard]] std::vector<AlertRecord> alerts(const AlertQuery& query);
  [[nodiscard]] std::optional<AlertRecord> alert(std::int64_t id);
  /// The oldest undelivered, not given up message of `route`, whether due or not: order per route is kept.
  [[nodiscard]] std::optional<OutboxMessage> next_message(std::string_view route);
  /// Messages of every route that ever had one.
  [[nodiscard]] std::vector<MessageCount> message_counts();
  [[nodiscard]] std::vector<FileRow> files(const FileQuery& query);
  /// Every file of the analyzer with kGrownOutcome, oldest first.
  void each_grown(std::string_view analyzer, const std::function<void(JournalFile&&)>& take);
  [[nodiscard]] std::vector<ReadingRow> readings(const ReadingQuery& query);

  // What a period had, oldest first; from <= time < to by our clock.
  /// Alerts that were open or acknowledged at some time of it.
  [[nodiscard]] std::vector<AlertRecord> alerts_between(Instant from, Instant to);
  [[nodiscard]] std::vector<FileRow> files_between(Instant from, Instant to);
  /// Every rejected row of those files.
  void each_rejected_between(Instant from, Instant to, const std::function<void(RejectedRow&&)>& take);
  /// In the order in which they were used, from the first start on.
  [[nodiscard]] std::vector<RecordedConfiguration> configurations();

  // As in Journal, as of the last commit; for replay and report.
  void each_check(std::string_view analyzer, std::string_view item, std::string_view measurand,
                  const std::function<void(Instant, std::int32_t replicate, double value)>& take);
  void each_split(std::string_view analyzer, std::string_view measurand,
                  const std::function<void(std::string_view sample, Instant, std::int32_t replicate,
                                           double value)>& take);
  [[nodiscard]] std::vector<JournalIntervention> interventions();
  /// Every step of every alert, in the order in which they were told.
  void each_transition(const std::function<void(PastTransition&&)>& take);
  /// As verify_database does.
  [[nodiscard]] JournalProof prove();
  /// Everything read within `work` is as of one moment, whatever is committed meanwhile.
  void at_one_moment(const std::function<void()>& work);

 private:
  struct Impl;
  explicit JournalReader(std::unique_ptr<Impl> impl);
  std::unique_ptr<Impl> impl_;
};

}  // namespace agreed
