#pragma once
// When a file in the drop folder has settled: pure rules, told what was seen and what time it is.
#include <chrono>
#include <cstdint>
#include <map>
#include <optional>
#include <set>
#include <string>
#include <utility>
#include <vector>

#include "core/base/instant.hpp"
#include "daemon/intake/file_content.hpp"

namespace agreed {

/// Monotonic time, for waiting.
using Tick = std::chrono::steady_clock::time_point;

/// How a file came to be known: by a scan; created before our eyes, so its close can be awaited; closed after
/// writing; renamed into the folder.
enum class Notice { scan, created, closed, renamed_in };

struct WaitingFile {
  FileStamp stamp;
  Notice notice = Notice::scan;
  Tick changed{};      ///< when a change of it was last seen
  bool due = false;    ///< taken out by take_due and not yet put back or forgotten
  bool retry = false;  ///< to be taken again at the next scan
  /// Newer files wait for it: it stood still since a scan found it, or could not be committed. A void must
  /// not overtake the reading that it takes back.
  bool first = false;
  Tick due_at{};
  std::uint64_t scan = 0;

  /// Its writer is known to have finished.
  [[nodiscard]] bool finished() const { return notice == Notice::closed || notice == Notice::renamed_in; }
};

class WaitingFiles {
 public:
  /// settle: how long a file known by scans only must stand still; unfinished: how long an empty file, one
  /// never closed, or one without a last line end must.
  WaitingFiles(Duration settle, Duration unfinished) : settle_(settle), unfinished_(unfinished) {}

  void see(const std::string& name, const FileStamp& stamp, Notice notice, Tick now);
  void forget(const std::string& name);
  /// The same, but a due file is left to who took it.
  void forget_unless_due(const std::string& name);
  /// Call before telling a whole scan by see(), and end_scan after it: what the scan did not show is
  /// forgotten.
  void begin_scan() { ++scan_; }
  void end_scan();
  /// Events were lost: a close may have been among them, so what is known is as if found by a scan.
  void events_lost(Tick now);

  /// The files that have settled, by mtime, then name. They stay due until forgotten or put back. One that is
  /// newer than a file found by a scan waits until that one has stood still for its time too (after a restart
  /// events bring the newer files, and only a scan the older ones), or has been tried again.
  [[nodiscard]] std::vector<std::pair<std::string, WaitingFile>> take_due(Tick now);
  /// Puts a due file back: it was seen to change.
  void changed(const std::string& name, const FileStamp& stamp, Tick now);
  /// Puts a due file back until it has been unchanged for `unfinished`; false if it has been.
  [[nodiscard]] bool wait_unfinished(const std::string& name, Tick now);
  /// Puts a due file back for the next scan. `in_order`: newer ones wait for it.
  void retry_at_scan(const std::string& name, bool in_order = false);

  [[nodiscard]] std::size_t size() const { return files_.size(); }
  [[nodiscard]] std::optional<Tick> next_due() const;

 private:
  using Place = std::pair<std::int64_t, std::string>;  ///< mtime and name: the order of arrival
  struct Barrier {
    Place place;
    std::optional<Tick> until;  ///< nothing: the next scan
  };
  [[nodiscard]] std::optional<Barrier> barrier(Tick now) const;
  void plan(const std::string& name, WaitingFile& file, Tick due_at);
  void unplan(const std::string& name, const WaitingFile& file);
  [[nodiscard]] Tick settled_at(const WaitingFile& file) const;

  Duration settle_, unfinished_;
  std::uint64_t scan_ = 0;
  std::map<std::string, WaitingFile> files_;
  std::set<std::pair<Tick, std::string>> plan_;
};

}  // namespace agreed
