#pragma once
// What waits for the engine: pieces of files, by analyzer, and other tasks. Bounded; filled by many threads,
// emptied by one.
#include <condition_variable>
#include <cstdint>
#include <deque>
#include <exception>
#include <functional>
#include <future>
#include <memory>
#include <mutex>
#include <string>
#include <vector>

#include "daemon/intake/pulse.hpp"
#include "daemon/intake/row.hpp"
#include "daemon/intake/sink.hpp"

namespace agreed {

struct QueuedPiece {
  FilePiece piece;
  Instant oldest{};  ///< measured_at of its oldest row
  std::promise<PieceAnswer> answer;
};

struct TakenIn;

/// Something done inside a batch; `after` hears whether it was committed (nothing) or why not. Each may be
/// empty.
struct Task {
  std::function<void(Instant now)> inside{};
  std::function<void(const std::string& failure)> after{};
  std::function<void(TakenIn& taken)> take_in{};  ///< beside the pieces, before they are concluded upon
};

struct Work {
  std::vector<QueuedPiece> pieces;
  std::vector<Task> tasks;
  bool tick = false;  ///< an inbox was looked at: time to look at the clock
  bool stop = false;
};

class WorkQueue {
 public:
  static constexpr std::size_t kBatchRows = 10'000;
  static constexpr std::size_t kBatchFiles = 1'000;

  explicit WorkQueue(std::size_t analyzers);

  /// Blocks while the analyzer's part is full. Throws std::runtime_error once stopped.
  std::future<PieceAnswer> put(FilePiece piece);
  /// Never blocks. False once stopped.
  bool put(Task task);
  void report(AnalyzerIndex analyzer, const InboxState& state);
  /// What is known of the inbox before its watcher's first report.
  void expect(AnalyzerIndex analyzer, const InboxState& state);
  /// The analyzer's watcher, which reports at least once in `rescan` unless its folder holds it up: then
  /// inboxes() says so.
  void watch_over(AnalyzerIndex analyzer, std::shared_ptr<const Pulse> pulse, Duration rescan);
  /// What was taken of the analyzer could not be committed: at least one file of it waits, until its next
  /// report.
  void still_waits(AnalyzerIndex analyzer);
  /// What waits of the analyzer fails too, and what is still to come of that round of its watcher: nothing
  /// may be committed before what came earlier.
  void refuse_round(AnalyzerIndex analyzer, std::uint64_t round, const std::string& why);
  /// Refuses whatever comes from now on, and what waits.
  void stop();

  /// Waits for something to do, at most `patience`; takes one batch, oldest measured_at first, so that the
  /// analyzers stay in step.
  [[nodiscard]] Work take(Duration patience);

  [[nodiscard]] std::vector<InboxState> inboxes() const;

 private:
  struct Lane {
    std::deque<QueuedPiece> waiting;
    std::size_t rows = 0;
    std::uint64_t refused_round = 0;
    std::exception_ptr refused_why;
    InboxState inbox;
    std::shared_ptr<const Pulse> pulse;
    Duration rescan{};
    Pulse::Clock::time_point reported{};
    bool hang_noticed = false;
  };
  [[nodiscard]] Lane* oldest_lane();
  /// When to look at the pulses next, unless something is reported before.
  [[nodiscard]] Pulse::Clock::time_point next_look() const;
  /// True if a folder was found not to answer that answered before.
  bool notice_hangs();
  void wait_for_laggards(std::unique_lock<std::mutex>& lock);

  mutable std::mutex mutex_;
  std::condition_variable changed_, has_room_;
  std::vector<Lane> lanes_;
  std::vector<Task> tasks_;
  bool tick_ = false;
  bool stop_ = false;
};

}  // namespace agreed
