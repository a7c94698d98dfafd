#pragma once
// Pieces handed to the engine whose answers have not come yet. Many small files wait together, so that they
// share one commit; answers are taken in the order of the pieces.
#include <cstdint>
#include <deque>
#include <exception>
#include <functional>
#include <future>
#include <memory>
#include <stop_token>
#include <string>

#include "daemon/intake/file_content.hpp"
#include "daemon/intake/pulse.hpp"
#include "daemon/intake/sink.hpp"

namespace agreed {

/// A file being taken in.
struct TakenFile {
  std::string name;        ///< that it came with
  bool growing = false;    ///< it stays where it is
  std::string moved_path;  ///< relative to the inbox, of a file that grew after its move; else empty
  FileStamp stamp;         ///< as it was read
  std::size_t unanswered = 0;
  bool failed = false;   ///< a piece could not be committed
  bool dropped = false;  ///< it changed while it was read: its answers are of no interest
};

/// Thrown out of a wait when the watcher is to stop. Not an error.
struct Stopping {};

struct QueueLimits {
  std::size_t files = 1000;
  std::size_t rows = 30'000;
};

class AnswerQueue {
 public:
  /// Called for a file when its last answer has come, or when all answers have come after one failed; then
  /// TakenFile::failed says so and `error` why.
  using Settle = std::function<void(TakenFile&, const PieceAnswer&, const std::string& error)>;

  /// `pulse` rests while the queue waits for the engine.
  AnswerQueue(IntakeSink& sink, QueueLimits limits, Pulse& pulse, Settle settle)
      : sink_(sink), limits_(limits), pulse_(pulse), settle_(std::move(settle)) {}

  /// Hands over a piece of `file`, after waiting for room. False if a piece of it has failed: give no more.
  /// The last of several pieces is handed over only when the others are committed, so that a file is never
  /// marked done with a hole in it. Throws Stopping.
  bool submit(const std::shared_ptr<TakenFile>& file, FilePiece&& piece, const std::stop_token& stop);
  /// Waits for all answers. Throws Stopping.
  void drain(const std::stop_token& stop);

 private:
  struct Waiting {
    std::shared_ptr<TakenFile> file;
    std::future<PieceAnswer> answer;
    std::size_t rows = 0;
    bool last = false;
  };

  void take_answer(const std::stop_token& stop);
  void answered(const Waiting& waiting, const PieceAnswer& answer, const std::string& error);

  IntakeSink& sink_;
  QueueLimits limits_;
  Pulse& pulse_;
  Settle settle_;
  std::deque<Waiting> waiting_;
  std::size_t rows_ = 0;
  std::uint64_t round_ = 1;  ///< from one drain() to the next
};

}  // namespace agreed
