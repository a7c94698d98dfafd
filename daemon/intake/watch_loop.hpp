#pragma once
// What the thread of a FolderWatcher does.
#include <list>
#include <map>
#include <memory>
#include <optional>
#include <stop_token>
#include <string>

#include "core/base/settings.hpp"
#include "daemon/intake/answer_queue.hpp"
#include "daemon/intake/folder_watcher.hpp"
#include "daemon/intake/growing_intake.hpp"
#include "daemon/intake/inbox.hpp"
#include "daemon/intake/moved_files.hpp"
#include "daemon/intake/pulse.hpp"
#include "daemon/intake/waiting_files.hpp"

namespace agreed {

class WatchLoop {
 public:
  WatchLoop(const IntakeSettings& intake, const Settings& settings, AnalyzerIndex analyzer, IntakeSink& sink,
            const WatcherLimits& limits);
  WatchLoop(const WatchLoop&) = delete;
  WatchLoop& operator=(const WatchLoop&) = delete;

  /// As FolderWatcher::follow.
  void follow(const WatchLoop& before);
  /// Until `stop`; never throws.
  void run(const std::stop_token& stop) noexcept;
  /// Ends a wait, from any thread.
  void wake() const { inbox_.wake(); }
  [[nodiscard]] std::shared_ptr<const Pulse> pulse() const { return pulse_; }

 private:
  /// A file that was committed and could not be moved: tried again at each scan, not read again.
  struct Unmoved {
    TakenFile file;
    PieceAnswer answer;
  };

  void turn(const std::stop_token& stop);
  void scan(Tick now, const std::stop_token& stop);
  void list(Tick now);
  void note(const InboxEvents& events, Tick now);
  void notice(const std::string& name, Notice notice, Tick now);
  void notice_growing(const std::string& name, Notice notice, Tick now);
  [[nodiscard]] std::optional<Tick> next_due() const;
  /// The format takes files of this name.
  [[nodiscard]] bool is_wanted(const std::string& name) const;
  void leave(const std::string& name);

  void take_due(const std::stop_token& stop);
  void take_due_growing(const std::stop_token& stop);
  void take(const std::string& name, const WaitingFile& waiting, const std::stop_token& stop);
  void refuse(const std::string& name, const FileStamp& stamp, std::string why, const std::stop_token& stop);
  void read(const FileContent& content, const std::shared_ptr<TakenFile>& file, bool closed,
            const std::stop_token& stop);
  void look_again(Tick now, const std::stop_token& stop);

  void settle(TakenFile& file, const PieceAnswer& answer, const std::string& error);
  void move(const TakenFile& file, const PieceAnswer& answer);
  void move_unmoved();

  void reachable(const std::string& why_not);
  void report(bool always);
  void tell_once(const std::string& what, const std::string& words);
  [[nodiscard]] PlainContext context() const;

  IntakeSettings intake_;
  const Settings& settings_;
  AnalyzerIndex analyzer_;
  IntakeSink& sink_;
  WatcherLimits limits_;
  std::shared_ptr<const LocalZone> zone_;
  std::shared_ptr<Pulse> pulse_;
  Inbox inbox_;
  WaitingFiles waiting_;
  MovedFiles moved_;
  AnswerQueue queue_;
  std::optional<GrowingIntake> growing_;  ///< of a folder whose files grow; then nothing is ever moved
  std::map<std::string, Unmoved> unmoved_;
  std::map<std::string, std::string> told_;  ///< warnings already logged, so that none repeats at every scan
  InboxState state_, reported_;
  bool commit_failed_ = false;  ///< in this round: what is newer must not overtake what failed
  Tick next_scan_{};
  Tick last_report_{};
};

}  // namespace agreed
