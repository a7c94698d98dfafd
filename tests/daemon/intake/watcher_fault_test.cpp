// What may go wrong around a drop folder, and what happens then.
#include <chrono>
#include <fstream>

#include <doctest/doctest.h>

#include "tests/daemon/intake/watched_folder.hpp"

using namespace agreed;
using namespace agreed::testing;
using Clock = std::chrono::steady_clock;

TEST_CASE("after a failed commit the file stays and is taken at a later scan") {
  WatchedFolder folder;
  folder.sink.fail_next(3);
  folder.start_watching();
  write_file(folder.inbox / "a.csv", csv("S-1"));
  CHECK(eventually([&] { return folder.sink.submitted() >= 2; }));
  CHECK(fs::exists(folder.inbox / "a.csv"));
  CHECK(folder.comes_to_done("a.csv"));
  CHECK(folder.sink.submitted() == 4);
  CHECK(folder.sink.rows() == 1);
  CHECK(eventually([&] { return folder.sink.state().pending == 0; }));
}

TEST_CASE("when a piece of a large file fails, its last piece is not given") {
  WatchedFolder folder;
  folder.limits.read.piece_rows = 10;
  folder.limits.queue.rows = 1000;
  std::string text = kCsvHeader;
  for (int i = 0; i < 95; ++i) text += csv_row("S-" + std::to_string(i));
  folder.sink.fail_next(1);
  folder.sink.withhold(true);
  folder.start_watching();
  write_file(folder.inbox / "a.csv", text);
  CHECK(eventually([&] { return folder.sink.withheld() == 9; }));
  folder.sink.withhold(false);
  CHECK(folder.comes_to_done("a.csv"));
  const auto pieces = folder.sink.pieces();
  // Eight of the first reading, then ten of the second.
  REQUIRE(pieces.size() == 18);
  for (std::size_t i = 0; i < 10; ++i) {
    const FilePiece& piece = pieces[8 + i];
    CHECK(piece.piece == i);
    CHECK(piece.last == (i == 9));
    CHECK(piece.rows.size() == (i == 9 ? 5 : 10));
  }
}

TEST_CASE("many small files wait for their commit together, up to the limit") {
  WatchedFolder folder;
  folder.limits.queue.files = 20;
  for (int i = 0; i < 50; ++i)
    write_file(folder.inbox / (std::to_string(i) + ".csv"), csv(std::to_string(i)));
  folder.sink.withhold(true);
  folder.start();
  CHECK(eventually([&] { return folder.sink.withheld() == 20; }));
  folder.sink.withhold(false);
  CHECK(eventually([&] { return folder.sink.names().size() == 50; }));
  CHECK(folder.sink.most_withheld() == 20);
  CHECK(eventually([&] { return folder.sink.state().pending == 0; }));
}

TEST_CASE("a missing inbox is reported, never created, and taken up when it comes") {
  WatchedFolder folder;
  fs::remove(folder.inbox);
  folder.start();
  CHECK(eventually([&] { return !folder.sink.state().reason.empty(); }));
  CHECK_FALSE(folder.sink.state().reachable);
  CHECK(folder.scans_pass());
  CHECK_FALSE(fs::exists(folder.inbox));
  fs::create_directory(folder.inbox);
  CHECK(eventually([&] { return folder.sink.state().reachable; }));
  write_file(folder.inbox / "a.csv", csv("S-1"));
  CHECK(folder.comes_to_done("a.csv"));
}

TEST_CASE("an inbox that is removed and recreated, or renamed and replaced, is watched again") {
  WatchedFolder folder;
  folder.start_watching();
  fs::remove(folder.inbox);
  CHECK(eventually([&] { return !folder.sink.state().reachable; }));
  fs::create_directory(folder.inbox);
  CHECK(eventually([&] { return folder.sink.state().reachable; }));
  write_file(folder.inbox / "a.csv", csv("S-1"));
  CHECK(folder.comes_to_done("a.csv"));

  fs::rename(folder.inbox, folder.temp.path() / "old");
  fs::create_directory(folder.inbox);
  write_file(folder.inbox / "b.csv", csv("S-2"));
  CHECK(folder.comes_to_done("b.csv"));
  write_file(folder.temp.path() / "old" / "c.csv", csv("S-3"));
  CHECK(folder.scans_pass());
  CHECK(fs::exists(folder.temp.path() / "old" / "c.csv"));
}

TEST_CASE("a removed inbox is noticed by its event, long before the next scan") {
  WatchedFolder folder;
  folder.intake.rescan = std::chrono::hours(1);
  folder.start_watching();
  fs::remove(folder.inbox);
  CHECK(eventually([&] { return !folder.sink.state().reachable; }));
}

namespace {

/// An inbox that is a link, so that it can lie on a file system of its own or on that of the folders above.
struct Mount : WatchedFolder {
  Mount() {
    intake.inbox = temp.path() / "mount";
    limits.mount_table = temp.path() / "fstab";
  }
  void lies_at(const fs::path& place) const {
    fs::remove(intake.inbox);
    fs::create_directory_symlink(place, intake.inbox);
  }
  [[nodiscard]] bool told(const std::string& words) const {
    return eventually([&] { return sink.state().reason.find(words) != std::string::npos; });
  }

  TempFolder share{"/dev/shm"};
};

}  // namespace

TEST_CASE("an empty folder whose file system begins further up is taken for a share that is not mounted") {
  Mount mount;
  mount.lies_at(mount.share.path());
  mount.start_watching();
  mount.lies_at(mount.inbox);
  CHECK(mount.told("is it mounted?"));
  SUBCASE("until the share is back") {
    mount.lies_at(mount.share.path());
    CHECK(eventually([&] { return mount.sink.state().reachable; }));
  }
  SUBCASE("until it has a file") {
    write_file(mount.inbox / "a.csv", csv("S-1"));
    CHECK(mount.comes_to_done("a.csv"));
  }
  SUBCASE("also by the watcher after a reload") {
    mount.watcher->stop();
    FolderWatcher next(mount.intake, mount.settings, AnalyzerIndex{0}, mount.sink, mount.limits);
    next.follow(*mount.watcher);
    next.start();
    CHECK(mount.scans_pass());
    CHECK_FALSE(mount.sink.state().reachable);
  }
}

TEST_CASE("an empty share that is mounted where there was none is taken for the inbox at once") {
  Mount mount;
  mount.lies_at(mount.inbox);
  mount.start_watching();
  mount.lies_at(mount.share.path());
  CHECK(mount.scans_pass());
  CHECK(mount.sink.state().reachable);
  mount.lies_at(mount.inbox);
  CHECK(mount.told("is it mounted?"));
}

TEST_CASE(
    "where the machine's table has a mount point, an empty folder without it is not taken for the inbox") {
  Mount mount;
  const auto table_has = [&](const fs::path& point, const std::string& options) {
    write_file(mount.limits.mount_table,
               "# the shares\nUUID=1 / ext4 defaults 0 1\n\nUUID=2 none swap sw 0 0\n//pc/export " +
                   fs::canonical(point).string() + " cifs " + options + " 0 0\n");
  };
  mount.lies_at(mount.inbox);
  SUBCASE("at the folder") {
    table_has(mount.inbox, "credentials=/etc/line1,_netdev,nofail");
    mount.start();
    CHECK(mount.told("nothing is mounted at " + fs::canonical(mount.inbox).string()));
    CHECK_FALSE(mount.sink.state().reachable);
    write_file(mount.inbox / "a.csv", csv("S-1"));
    CHECK(mount.comes_to_done("a.csv"));
  }
  SUBCASE("above the folder") {
    table_has(mount.temp.path(), "_netdev");
    mount.start();
    CHECK(mount.told("nothing is mounted at " + fs::canonical(mount.temp.path()).string()));
    mount.lies_at(mount.share.path());
    CHECK(eventually([&] { return mount.sink.state().reachable; }));
  }
  SUBCASE("but one that is there") {
    mount.lies_at(mount.share.path());
    table_has("/dev/shm", "nosuid");
    mount.start_watching();
    CHECK(mount.sink.state().reachable);
  }
  SUBCASE("but a folder that is mounted elsewhere as well") {
    table_has(mount.inbox, "bind");
    mount.start_watching();
    CHECK(mount.sink.state().reachable);
  }
  SUBCASE("but another one") {
    table_has("/dev/shm", "nosuid");
    mount.start_watching();
    CHECK(mount.sink.state().reachable);
  }
  SUBCASE("but a table that is not there") {
    mount.start_watching();
    CHECK(mount.sink.state().reachable);
  }
}

TEST_CASE("a file that cannot be moved is not read again, and moved when that is possible") {
  WatchedFolder folder;
  fs::create_directory(folder.inbox / "done");
  write_file(folder.inbox / "done" / "2026-01-05", "in the way of the folder of the day");
  folder.start_watching();
  write_file(folder.inbox / "a.csv", csv("S-1"));
  CHECK(eventually([&] { return folder.sink.submitted() == 1; }));
  CHECK(folder.scans_pass(4));
  CHECK(folder.sink.submitted() == 1);
  CHECK(fs::exists(folder.inbox / "a.csv"));
  fs::remove(folder.inbox / "done" / "2026-01-05");
  CHECK(folder.comes_to_done("a.csv"));
  CHECK(folder.sink.submitted() == 1);
}

TEST_CASE("a link in the place of done/ is not followed out of the inbox") {
  WatchedFolder folder;
  folder.intake.rescan = std::chrono::hours(1);
  folder.start_watching();
  folder.sink.withhold(true);
  write_file(folder.inbox / "a.csv", csv("S-1"));
  CHECK(eventually([&] { return folder.sink.withheld() == 1; }));
  fs::create_directory(folder.temp.path() / "elsewhere");
  fs::create_directory_symlink(folder.temp.path() / "elsewhere", folder.inbox / "done");
  folder.sink.withhold(false);
  CHECK(eventually([&] { return folder.sink.state().pending == 0; }));
  CHECK(fs::exists(folder.inbox / "a.csv"));
  CHECK(fs::is_empty(folder.temp.path() / "elsewhere"));
}

TEST_CASE("a file that grew after it was moved to done/ is read again there") {
  WatchedFolder folder;
  folder.start_watching();
  std::ofstream writer(folder.temp.path() / "a.jsonl");
  const std::string object =
      R"({"kind":"split","measured_at":"2026-01-05T06:00:00Z","measurand":"protein","item":"S","value":1})";
  writer << object << "\n" << std::flush;
  fs::rename(folder.temp.path() / "a.jsonl", folder.inbox / "a.jsonl");
  CHECK(folder.comes_to_done("a.jsonl"));
  writer << object << "\n" << std::flush;
  CHECK(eventually([&] { return folder.sink.names().size() == 2; }));
  CHECK(folder.sink.names().back() == "a.jsonl");
  CHECK(folder.sink.pieces().back().rows.size() == 2);
  CHECK(fs::exists(folder.done("a.jsonl")));
  CHECK(folder.scans_pass(4));
  CHECK(folder.sink.submitted() == 2);
}

TEST_CASE("a file replaced between its reading and its move is not moved for the other") {
  WatchedFolder folder;
  folder.sink.withhold(true);
  folder.start_watching();
  write_file(folder.inbox / "a.csv", csv("S-1"));
  CHECK(eventually([&] { return folder.sink.withheld() == 1; }));
  write_file(folder.temp.path() / "new.csv", csv("S-2"));
  fs::rename(folder.temp.path() / "new.csv", folder.inbox / "a.csv");
  folder.sink.withhold(false);
  CHECK(folder.comes_to_done("a.csv"));
  CHECK(read_whole(folder.done("a.csv")) == csv("S-2"));
  REQUIRE(folder.sink.pieces().size() == 2);
  CHECK(folder.sink.pieces()[1].rows[0].item == "S-2");
}

TEST_CASE("a file that is removed while it waits is forgotten") {
  WatchedFolder folder;
  folder.limits.unfinished = std::chrono::hours(1);
  folder.start_watching();
  write_file(folder.inbox / "a.csv", "");
  CHECK(eventually([&] { return folder.sink.state().pending == 1; }));
  fs::remove(folder.inbox / "a.csv");
  CHECK(eventually([&] { return folder.sink.state().pending == 0; }));
  CHECK(folder.sink.submitted() == 0);
}

TEST_CASE("stop returns promptly while answers are outstanding, and the files stay") {
  WatchedFolder folder;
  folder.sink.withhold(true);
  folder.start_watching();
  write_file(folder.inbox / "a.csv", csv("S-1"));
  CHECK(eventually([&] { return folder.sink.withheld() == 1; }));
  const auto from = Clock::now();
  folder.watcher->stop();
  CHECK(Clock::now() - from < std::chrono::milliseconds(500));
  CHECK(folder.watcher->stopped());
  CHECK(fs::exists(folder.inbox / "a.csv"));
  folder.sink.withhold(false);
  folder.start();
  CHECK(folder.comes_to_done("a.csv"));
}

TEST_CASE("stop returns at once from an idle watcher and from one that never ran") {
  WatchedFolder folder;
  folder.intake.rescan = std::chrono::hours(1);
  folder.start_watching();
  const auto from = Clock::now();
  folder.watcher->stop();
  CHECK(Clock::now() - from < std::chrono::milliseconds(200));
  FolderWatcher idle(folder.intake, folder.settings, {0}, folder.sink);
  CHECK(idle.stopped());
}

TEST_CASE("an unknown zone is told at once") {
  WatchedFolder folder;
  folder.intake.zone = "Europe/Atlantis";
  CHECK_THROWS_AS(FolderWatcher(folder.intake, folder.settings, {0}, folder.sink), std::runtime_error);
}
