#include "daemon/engine/work_queue.hpp"

#include <algorithm>
#include <optional>
#include <stdexcept>
#include <utility>

#include "daemon/clock.hpp"

namespace agreed {
namespace {

using Clock = Pulse::Clock;

/// One access to a folder that takes longer than this: the folder hangs.
constexpr std::chrono::seconds kHangs{10};

constexpr std::size_t kLaneRows = 2 * WorkQueue::kBatchRows;
constexpr std::size_t kLanePieces = 2 * WorkQueue::kBatchFiles;

// From this many waiting rows or files on it is a backlog, in which analyzers should stay in step.
constexpr std::size_t kBacklogRows = WorkQueue::kBatchRows / 2;
constexpr std::size_t kBacklogFiles = WorkQueue::kBatchFiles / 2;
constexpr std::chrono::milliseconds kPatienceWithLaggards{50};

/// How long its folder has not answered, if it is long.
std::optional<Clock::duration> hangs_for(const Pulse& pulse) {
  const auto step = pulse.stepping_since();
  const auto now = Clock::now();
  if (!step || now - *step < kHangs) return std::nullopt;
  return now - *step;
}

Instant oldest_of(const FilePiece& piece) {
  Instant oldest{Duration::max()};
  for (const Row& row : piece.rows) oldest = std::min(oldest, row.measured_at);
  return piece.rows.empty() ? Instant{Duration::min()} : oldest;
}

std::future<PieceAnswer> refused(const std::exception_ptr& why) {
  std::promise<PieceAnswer> answer;
  answer.set_exception(why);
  return answer.get_future();
}

}  // namespace

WorkQueue::WorkQueue(std::size_t analyzers) : lanes_(analyzers) {}

std::future<PieceAnswer> WorkQueue::put(FilePiece piece) {
  std::unique_lock lock(mutex_);
  Lane& lane = lanes_.at(piece.file.analyzer.value);
  has_room_.wait(lock, [&] {
    return stop_ || lane.waiting.empty() || (lane.rows < kLaneRows && lane.waiting.size() < kLanePieces);
  });
  if (stop_) throw std::runtime_error("the service is stopping");
  if (piece.round != 0 && piece.round == lane.refused_round) return refused(lane.refused_why);
  lane.rows += piece.rows.size();
  const Instant oldest = oldest_of(piece);
  lane.waiting.push_back({std::move(piece), oldest, {}});
  auto answer = lane.waiting.back().answer.get_future();
  changed_.notify_one();
  return answer;
}

bool WorkQueue::put(Task task) {
  const std::lock_guard lock(mutex_);
  if (stop_) return false;
  tasks_.push_back(std::move(task));
  changed_.notify_one();
  return true;
}

void WorkQueue::report(AnalyzerIndex analyzer, const InboxState& state) {
  const std::lock_guard lock(mutex_);
  Lane& lane = lanes_.at(analyzer.value);
  lane.inbox = state;
  lane.reported = Clock::now();
  lane.hang_noticed = false;
  tick_ = true;
  changed_.notify_one();
}

void WorkQueue::expect(AnalyzerIndex analyzer, const InboxState& state) {
  const std::lock_guard lock(mutex_);
  lanes_.at(analyzer.value).inbox = state;
}

void WorkQueue::still_waits(AnalyzerIndex analyzer) {
  const std::lock_guard lock(mutex_);
  InboxState& inbox = lanes_.at(analyzer.value).inbox;
  inbox.pending = std::max(inbox.pending, decltype(inbox.pending){1});
}

void WorkQueue::refuse_round(AnalyzerIndex analyzer, std::uint64_t round, const std::string& why) {
  const auto error = std::make_exception_ptr(std::runtime_error(why));
  std::deque<QueuedPiece> refused;
  {
    const std::lock_guard lock(mutex_);
    Lane& lane = lanes_.at(analyzer.value);
    refused.swap(lane.waiting);
    lane.rows = 0;
    lane.refused_round = round;
    lane.refused_why = error;
    has_room_.notify_all();
  }
  for (QueuedPiece& queued : refused) queued.answer.set_exception(error);
}

void WorkQueue::stop() {
  std::vector<Lane> left(lanes_.size());
  std::vector<Task> tasks;
  {
    const std::lock_guard lock(mutex_);
    stop_ = true;
    for (std::size_t i = 0; i < lanes_.size(); ++i) left[i].waiting.swap(lanes_[i].waiting);
    tasks.swap(tasks_);
    changed_.notify_all();
    has_room_.notify_all();
  }
  // Whoever waits for an answer must not wait for ever.
  const std::string why = "the service is stopping";
  const auto error = std::make_exception_ptr(std::runtime_error(why));
  for (Lane& lane : left)
    for (QueuedPiece& queued : lane.waiting) queued.answer.set_exception(error);
  for (const Task& task : tasks)
    if (task.after) task.after(why);
}

void WorkQueue::watch_over(AnalyzerIndex analyzer, std::shared_ptr<const Pulse> pulse, Duration rescan) {
  const std::lock_guard lock(mutex_);
  Lane& lane = lanes_.at(analyzer.value);
  lane.pulse = std::move(pulse);
  lane.rescan = rescan;
  lane.reported = Clock::now() - rescan;  // its first scan is due now
  changed_.notify_one();
}

Clock::time_point WorkQueue::next_look() const {
  auto next = Clock::time_point::max();
  for (const Lane& lane : lanes_) {
    if (!lane.pulse || lane.hang_noticed) continue;
    const auto step = lane.pulse->stepping_since();
    next = std::min(next, (step ? *step : lane.reported + lane.rescan) + kHangs);
  }
  return next;
}

bool WorkQueue::notice_hangs() {
  bool found = false;
  for (Lane& lane : lanes_) {
    if (!lane.pulse || lane.hang_noticed) continue;
    if (hangs_for(*lane.pulse)) {
      lane.hang_noticed = found = true;
    } else if (lane.reported + lane.rescan + kHangs <= Clock::now()) {
      lane.reported = Clock::now();  // late, yet at work or waiting for us
    }
  }
  return found;
}

WorkQueue::Lane* WorkQueue::oldest_lane() {
  Lane* oldest = nullptr;
  for (Lane& lane : lanes_) {
    if (lane.waiting.empty()) continue;
    if (oldest == nullptr || lane.waiting.front().oldest < oldest->waiting.front().oldest) oldest = &lane;
  }
  return oldest;
}

void WorkQueue::wait_for_laggards(std::unique_lock<std::mutex>& lock) {
  std::size_t rows = 0, files = 0;
  for (const Lane& lane : lanes_) {
    rows += lane.rows;
    files += lane.waiting.size();
  }
  if (rows < kBacklogRows && files < kBacklogFiles) return;
  changed_.wait_for(lock, kPatienceWithLaggards, [this] {
    return stop_ || std::none_of(lanes_.begin(), lanes_.end(), [](const Lane& lane) {
             return lane.waiting.empty() && lane.inbox.pending > 0;
           });
  });
}

Work WorkQueue::take(Duration patience) {
  std::unique_lock lock(mutex_);
  changed_.wait_until(lock, std::min(Clock::now() + patience, next_look()),
                      [this] { return stop_ || tick_ || !tasks_.empty() || oldest_lane() != nullptr; });
  if (notice_hangs()) tick_ = true;
  wait_for_laggards(lock);
  Work work;
  work.tasks.swap(tasks_);
  work.tick = std::exchange(tick_, false);
  work.stop = stop_;
  std::size_t rows = 0;
  while (rows < kBatchRows && work.pieces.size() < kBatchFiles) {
    Lane* lane = oldest_lane();
    if (lane == nullptr) break;
    const std::size_t more = lane->waiting.front().piece.rows.size();
    if (!work.pieces.empty() && rows + more > kBatchRows) break;
    rows += more;
    lane->rows -= more;
    work.pieces.push_back(std::move(lane->waiting.front()));
    lane->waiting.pop_front();
  }
  has_room_.notify_all();
  return work;
}

std::vector<InboxState> WorkQueue::inboxes() const {
  const std::lock_guard lock(mutex_);
  std::vector<InboxState> states;
  for (const Lane& lane : lanes_) {
    states.push_back(lane.inbox);
    const auto since = lane.pulse ? hangs_for(*lane.pulse) : std::nullopt;
    if (!since) continue;
    InboxState& state = states.back();
    state.reachable = false;
    state.hangs = true;
    state.reason = "the folder does not answer";
    if (!state.unreachable_since) state.unreachable_since = now_utc() - std::chrono::floor<Duration>(*since);
  }
  return states;
}

}  // namespace agreed
