// More files at once than the kernel's event queue holds.
#include <doctest/doctest.h>

#include "tests/daemon/intake/watched_folder.hpp"

using namespace agreed;
using namespace agreed::testing;

TEST_CASE("more files than the event queue holds are all found by the scan") {
  // fs.inotify.max_queued_events is 16384; the withheld answer keeps the watcher from reading events.
  constexpr int kFiles = 17'500;
  WatchedFolder folder;
  folder.sink.withhold(true);
  folder.start_watching();
  write_file(folder.inbox / "first.csv", csv("first"));
  CHECK(eventually([&] { return folder.sink.withheld() == 1; }));
  const std::string text = csv("S-1");
  for (int i = 0; i < kFiles; ++i) write_file(folder.inbox / (std::to_string(i) + ".csv"), text);
  folder.sink.withhold(false);
  CHECK(eventually([&] { return folder.sink.names().size() == kFiles + 1; }, std::chrono::seconds(60)));
  CHECK(eventually([&] { return folder.sink.state().pending == 0; }));
}
