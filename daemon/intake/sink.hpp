#pragma once
// Where a watcher hands its pieces: the engine, or a test.
#include <cstdint>
#include <functional>
#include <future>
#include <optional>
#include <string>
#include <vector>

#include "config/config.hpp"
#include "daemon/intake/row.hpp"

namespace agreed {

/// How far a growing file was taken in.
struct GrowingState {
  std::string name;              ///< raw bytes
  std::uint64_t taken = 0;       ///< bytes from its start
  std::uint64_t unfinished = 0;  ///< bytes behind them that wait for their line end
};

/// State of one inbox as its watcher last saw it.
struct InboxState {
  bool reachable = false;
  std::string reason;         ///< why not
  std::uint64_t pending = 0;  ///< files noticed and not yet committed
  bool scanned_once = false;
  std::vector<GrowingState> growing{};         ///< the newest, by name
  std::optional<Instant> unreachable_since{};  ///< nothing while it is reachable or was not looked at yet
  std::uint32_t failed_looks = 0;              ///< scans in a row that found it unreachable
  bool hangs = false;                          ///< it does not answer; found by others than its watcher
};

/// What was taken of a growing file at one time: its bytes from the start up to the end of a line.
struct TakenPortion {
  std::string name;  ///< raw bytes, without folder
  std::uint64_t size = 0;
  std::int64_t mtime_ns = 0;  ///< of the file when it was read
  std::string sha256;         ///< hex, of all `size` bytes
};

class IntakeSink {
 public:
  virtual ~IntakeSink() = default;
  /// Queues a piece; blocks while the queue is full. The answer comes after its batch is committed. The
  /// future throws when the batch could not be committed (disk full, ...): the file stays in the inbox and is
  /// tried again later. Pieces of one file come in order. After `stop` it throws.
  virtual std::future<PieceAnswer> submit(FilePiece piece) = 0;
  /// Gives all that was ever taken of the analyzer's growing files, oldest first. Throws when the journal
  /// cannot be read now. Called in the watcher's thread.
  virtual void each_portion(AnalyzerIndex analyzer, const std::function<void(TakenPortion&&)>& take) = 0;
  /// Tells what a watcher sees; called on every change and at each rescan.
  virtual void report(AnalyzerIndex analyzer, const InboxState& state) = 0;
};

}  // namespace agreed
