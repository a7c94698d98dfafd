#pragma once
// One drop folder: opened by its path again and again, listed, and watched for events where they work.
#include <chrono>
#include <cstdint>
#include <filesystem>
#include <optional>
#include <string>
#include <vector>

#include "daemon/descriptor.hpp"
#include "daemon/intake/waiting_files.hpp"

namespace agreed {

struct InboxEvents {
  struct Named {
    Notice notice;
    std::string name;
  };
  std::vector<Named> named;
  bool lost = false;  ///< the queue overflowed: scan
  bool gone = false;  ///< the watched folder was removed, renamed or unmounted: open it by its path again
};

class Inbox {
 public:
  /// `changes`: tell of every change of a file too, not only of its close. `mount_table`: which shares are to
  /// be mounted, fstab(5). Throws std::system_error if the process has no descriptors left.
  Inbox(std::filesystem::path path, bool changes, std::filesystem::path mount_table);

  /// Before the first open: where the share was mounted is known from `before`, of the same path.
  void remember(const Inbox& before) { home_ = before.home_; }
  /// Opens the folder that is at the path now, and watches it if it is another one than before; empty, or why
  /// it cannot be used. The folder is never created. An empty folder that is what is left when a share is not
  /// mounted is not taken for the inbox: one on a file system that begins further up than before, or below a
  /// mount point of the table at which nothing is mounted.
  [[nodiscard]] std::string open();
  /// Lets go of the folder, so that it can be unmounted; events still come.
  void close() { folder_.reset(); }
  [[nodiscard]] bool is_open() const { return folder_.valid(); }
  /// Descriptor of the open folder.
  [[nodiscard]] int folder() const { return folder_.get(); }
  /// Why there are no events and only the scans find files; empty if there are.
  [[nodiscard]] const std::string& no_events() const { return no_events_; }

  /// Names in the open folder. Throws std::system_error.
  [[nodiscard]] std::vector<std::string> names() const;

  /// Sleeps until an event, wake(), or `until`; gives the events that are there.
  [[nodiscard]] InboxEvents wait(Tick until);
  /// Ends a wait, from any thread.
  void wake() const;

 private:
  /// Where the folder lay when it was last taken for the inbox.
  struct Home {
    std::uint64_t device = 0;
    std::optional<int> levels;  ///< levels_below_mount
  };

  [[nodiscard]] std::string why_not_home(const Home& now) const;
  void watch();
  void forget_watch();
  void read_events(InboxEvents& events);

  std::filesystem::path path_, mount_table_;
  bool changes_;
  Descriptor wake_, notify_, folder_;
  std::string no_events_;
  int watch_ = -1;
  std::uint64_t device_ = 0, inode_ = 0;  ///< of the watched folder
  std::optional<Home> home_;
  std::optional<bool> is_link_;  ///< whether the path was a symbolic link when it was first opened
};

}  // namespace agreed
