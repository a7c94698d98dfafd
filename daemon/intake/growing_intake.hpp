#pragma once
// The growing files of one drop folder: which there are, under which names, and when each is read on.
#include <cstdint>
#include <deque>
#include <functional>
#include <map>
#include <memory>
#include <optional>
#include <stop_token>
#include <string>
#include <utility>
#include <vector>

#include "config/config.hpp"
#include "daemon/intake/answer_queue.hpp"
#include "daemon/intake/folder_watcher.hpp"
#include "daemon/intake/growing_file.hpp"
#include "daemon/intake/waiting_files.hpp"

namespace agreed {

/// Files stay where they are. One that was closed or renamed in is read on at once, one that was seen to
/// change after `settle`, whether it goes on changing or not: only whole lines are taken. A file is followed
/// by its device and inode, so that it may be renamed (rotation); its content is recognised by what was taken
/// before, whatever its name. A last line without line end waits for it.
class GrowingIntake {
 public:
  /// What it needs of its watcher; all of it must outlive it.
  struct Watcher {
    AnalyzerIndex analyzer;
    IntakeSink& sink;
    AnswerQueue& queue;
    std::function<PlainContext()> context;
    Pulse& pulse;
    std::function<void(const std::string& what, const std::string& words)> tell;  ///< a warning, once
  };

  GrowingIntake(Duration settle, const WatcherLimits& limits, Watcher watcher)
      : settle_(settle), limits_(limits), watcher_(std::move(watcher)) {}

  /// A name that is read. One that is not (`see_other`) is of interest only when a file known was renamed to
  /// it.
  void see(const std::string& name, const FileStamp& stamp, Notice notice, Tick now);
  void see_other(const std::string& name, const FileStamp& stamp, Tick now);
  /// Call before telling a whole scan, and end_scan after it: what the scan did not show is forgotten.
  void begin_scan(Tick now);
  void end_scan();

  /// Reads on what is due, in the folder (a descriptor). Throws Stopping.
  void take_due(int folder, const std::stop_token& stop);
  [[nodiscard]] std::optional<Tick> next_due() const;
  /// Files that changed and were not yet read on.
  [[nodiscard]] std::size_t pending() const;
  [[nodiscard]] std::vector<GrowingState> states() const;

 private:
  using Identity = std::pair<std::uint64_t, std::uint64_t>;  ///< device, inode
  struct Followed {
    std::string name;
    FileStamp seen;
    Tick changed{};
    std::optional<Tick> due;  ///< none: nothing to do
    bool waits = false;       ///< it changed since it was read
    bool failed = false;      ///< to be read at the next scan
    bool renamed = false;     ///< since it was first seen
    bool rest_told = false;   ///< of the unfinished line as it is now
    std::uint64_t scan = 0;
    std::uint64_t taken = 0;
    std::unique_ptr<GrowingFile> file;
  };

  void note_change(Followed& followed, const FileStamp& stamp, bool at_once, Tick now);
  void take(Followed& followed, int folder, const std::stop_token& stop);
  void place(Followed& followed, const FileContent& content);
  /// False if a portion could not be committed.
  bool read_on(Followed& followed, const FileContent& content, const std::stop_token& stop);
  bool hand_over(const Followed& followed, const FileStamp& stamp, FilePiece&& piece,
                 const std::stop_token& stop);
  void look_at_rest(Followed& followed, const FileContent& content, const std::stop_token& stop);
  void try_later(Followed& followed);
  void keep_few_open();

  void load_known();
  void know(TakenPortion&& portion);
  [[nodiscard]] std::vector<TakenPortion> known() const;

  Duration settle_;
  WatcherLimits limits_;
  Watcher watcher_;
  std::map<Identity, Followed> files_;
  std::uint64_t scan_ = 0;
  bool loaded_ = false;
  std::map<std::string, TakenPortion> last_by_name_;
  std::deque<TakenPortion> recent_;
};

}  // namespace agreed
