#pragma once
// Takes in what lands in one analyzer's drop folder, in a thread of its own, so that a folder that hangs
// blocks nothing else.
#include <filesystem>
#include <memory>

#include "config/config.hpp"
#include "daemon/intake/answer_queue.hpp"
#include "daemon/intake/file_reader.hpp"
#include "daemon/intake/pulse.hpp"
#include "daemon/intake/sink.hpp"

namespace agreed {

/// What the configuration does not set: waits and limits, which tests shorten, and what the machine is to
/// have.
struct WatcherLimits {
  Duration unfinished = std::chrono::seconds(60);  ///< an empty, unclosed or incomplete file stands still
  ReadLimits read;
  QueueLimits queue;
  std::filesystem::path mount_table = "/etc/fstab";  ///< which shares are to be mounted
};

class FolderWatcher {
 public:
  /// `settings` and `sink` must outlive the watcher. Throws std::runtime_error if the zone is unknown, or if
  /// the process has no file descriptors left.
  FolderWatcher(const IntakeSettings& intake, const Settings& settings, AnalyzerIndex analyzer,
                IntakeSink& sink, const WatcherLimits& limits = {});
  /// Stops.
  ~FolderWatcher();
  FolderWatcher(const FolderWatcher&) = delete;
  FolderWatcher& operator=(const FolderWatcher&) = delete;

  /// Before start: goes on with what `before`, which watched the same folder and has stopped, knew of files
  /// that were moved to done/ a moment ago, or could not be moved, and of where its share was mounted.
  void follow(const FolderWatcher& before);

  void start();
  /// Asks the thread to end and does not wait. Safe from any thread.
  void request_stop();
  /// Asks and waits. Takes well under a second unless the folder hangs or the sink blocks in submit: unblock
  /// the sink first. Files whose answers are outstanding stay in the inbox.
  void stop();
  /// Tells whether the thread is held up by its folder; outlives the watcher.
  [[nodiscard]] std::shared_ptr<const Pulse> pulse() const;
  /// True once the thread has ended, or before it began.
  [[nodiscard]] bool stopped() const;

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace agreed
