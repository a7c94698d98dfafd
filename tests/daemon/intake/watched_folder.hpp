#pragma once
// A drop folder with a watcher on it, waits shortened.
#include <filesystem>
#include <map>
#include <optional>
#include <string>

#include "daemon/intake/folder_watcher.hpp"
#include "tests/daemon/intake/fake_sink.hpp"
#include "tests/support/eventually.hpp"
#include "tests/support/harrow_mill.hpp"
#include "tests/support/temp_folder.hpp"

namespace agreed::testing {

namespace fs = std::filesystem;

const std::string kCsvHeader = "kind,measured_at,measurand,item,value\n";

inline std::string csv_row(const std::string& item) {
  return "split,2026-01-05T06:00:00Z,protein," + item + ",11.5\n";
}
inline std::string csv(const std::string& item) {
  return kCsvHeader + csv_row(item);
}

struct WatchedFolder {
  TempFolder temp;
  fs::path inbox = temp.path() / "line1";
  Settings settings = harrow_mill();
  IntakeSettings intake;
  WatcherLimits limits;
  FakeSink sink;
  std::optional<FolderWatcher> watcher;

  WatchedFolder() {
    fs::create_directory(inbox);
    intake.analyzer = "line1";
    intake.inbox = inbox;
    intake.settle = std::chrono::milliseconds(40);
    intake.rescan = std::chrono::milliseconds(60);
    limits.unfinished = std::chrono::milliseconds(400);
  }
  void start() {
    watcher.emplace(intake, settings, AnalyzerIndex{0}, sink, limits);
    watcher->start();
  }
  /// Starts and waits for the first scan, so that events are watched for.
  void start_watching() {
    start();
    eventually([&] { return sink.state().scanned_once; });
  }
  [[nodiscard]] fs::path done(const std::string& name) const { return inbox / "done" / "2026-01-05" / name; }
  [[nodiscard]] fs::path rejected(const std::string& name) const { return inbox / "rejected" / name; }
  [[nodiscard]] bool comes_to_done(const std::string& name) const {
    return eventually([&] { return fs::exists(done(name)); });
  }
  [[nodiscard]] bool comes_to_rejected(const std::string& name) const {
    return eventually([&] { return fs::exists(rejected(name)); });
  }
  /// Waits for a few scans to have passed.
  [[nodiscard]] bool scans_pass(int count = 3) const {
    const int from = sink.reports();
    return eventually([&] { return sink.reports() >= from + count; });
  }
};

}  // namespace agreed::testing
