#pragma once
// What goes into the journal and comes out of it.
#include <cstdint>
#include <limits>
#include <optional>
#include <stdexcept>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "core/base/instant.hpp"

namespace agreed {

/// The journal cannot be used or a batch could not be written; what() is for people. `retry`: the cause may
/// go away by itself (disk full, locked), so keep the work and try again. `damaged`: the file itself cannot
/// be trusted.
class JournalError : public std::runtime_error {
 public:
  JournalError(const std::string& what, bool retry_later, bool is_damaged = false)
      : std::runtime_error(what), retry(retry_later), damaged(is_damaged) {}
  bool retry;
  bool damaged;
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

/// Outcome of a file that stands for what was taken of a growing file at one time: its bytes from the start
/// up to the end of the last line taken.
inline constexpr const char* kGrownOutcome = "grown";

struct JournalFile {
  std::string analyzer, name, sha256;
  std::uint64_t size = 0;
  std::int64_t mtime_ns = 0;
  std::int64_t status_ns = std::numeric_limits<std::int64_t>::max();  ///< as in FileIdentity; not stored
};

/// A file of which some batches were committed (`finished`: all), and where its rejected rows so far were
/// (line, column).
struct BegunFile {
  std::int64_t id = 0;
  bool finished = false;
  std::vector<std::pair<std::uint32_t, std::uint32_t>> rejected;
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

  friend bool operator==(const ChainHead&, const ChainHead&) = default;
};

/// A message in the outbox.
struct OutboxMessage {
  std::int64_t id = 0;
  std::string webhook_id, route, type, body;
  std::int64_t alert = 0;  ///< 0: none (heartbeat, test)
  Instant created_at{}, due_at{};
  int tries = 0;
};

/// What became of asking for a message to be sent again.
enum class SendAgain { queued, unknown, waits_already };

/// A message as it is asked for again: whether it will be, and where it goes.
struct AskedAgain {
  SendAgain answer = SendAgain::queued;
  std::string route;  ///< empty when unknown
};

/// When a message was made, and whether it still waits to be delivered.
struct LastMessage {
  Instant created_at{};
  bool waits = false;
};

/// A route that fails: since when its oldest message tried in vain waits, and what the newest try was
/// answered (0: nothing).
struct FailingDelivery {
  Instant since{};
  int status = 0;
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

}  // namespace agreed
