#pragma once
// Where a watcher hands its pieces: the engine, or a test.
#include <future>

#include "config/config.hpp"
#include "daemon/intake/row.hpp"

namespace agreed {

/// State of one inbox as its watcher last saw it.
struct InboxState {
  bool reachable = false;
  std::string reason;         ///< why not
  std::uint64_t pending = 0;  ///< files noticed and not yet committed
  bool scanned_once = false;
};

class IntakeSink {
 public:
  virtual ~IntakeSink() = default;
  /// Queues a piece; blocks while the queue is full. The answer comes after its batch is committed. The
  /// future throws when the batch could not be committed (disk full, ...): the file stays in the inbox and is
  /// tried again later. Pieces of one file come in order. After `stop` it throws.
  virtual std::future<PieceAnswer> submit(FilePiece piece) = 0;
  /// Tells what a watcher sees; called on every change and at each rescan.
  virtual void report(AnalyzerIndex analyzer, const InboxState& state) = 0;
};

}  // namespace agreed
