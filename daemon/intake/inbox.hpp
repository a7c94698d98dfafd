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
  /// `changes`: tell of every change of a file too, not only of its close. Throws std::system_error if the
  /// process has no descriptors left.
  explicit Inbox(std::filesystem::path path, bool changes = false);

  /// Opens the folder that is at the path now, and watches it if it is another one than before; empty, or why
  /// it cannot be used. The folder is never created.
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
  void watch();
  void forget_watch();
  void read_events(InboxEvents& events);

  std::filesystem::path path_;
  bool changes_;
  Descriptor wake_, notify_, folder_;
  std::string no_events_;
  int watch_ = -1;
  std::uint64_t device_ = 0, inode_ = 0;  ///< of the watched folder
  std::optional<std::uint64_t> home_device_;
  std::optional<bool> is_link_;  ///< whether the path was a symbolic link when it was first opened
};

}  // namespace agreed
