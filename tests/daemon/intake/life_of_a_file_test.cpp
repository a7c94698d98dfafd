// From the drop folder to done/ or rejected/: when a file is taken, what is made of it, where it goes.
#include <chrono>
#include <fstream>

#include <doctest/doctest.h>
#include <sys/stat.h>

#include "tests/daemon/intake/watched_folder.hpp"

using namespace agreed;
using namespace agreed::testing;
using std::chrono::milliseconds;

TEST_CASE("a file that is closed after writing is taken at once and moved to the day of its commit") {
  WatchedFolder folder;
  folder.intake.rescan = std::chrono::hours(1);
  folder.intake.settle = std::chrono::hours(1);
  folder.start_watching();
  write_file(folder.inbox / "a.csv", csv("S-1"));
  CHECK(folder.comes_to_done("a.csv"));
  CHECK_FALSE(fs::exists(folder.inbox / "a.csv"));
  const auto pieces = folder.sink.pieces();
  REQUIRE(pieces.size() == 1);
  CHECK(pieces[0].last);
  CHECK(pieces[0].unusable == "");
  CHECK(pieces[0].file.name == "a.csv");
  CHECK(pieces[0].file.size == csv("S-1").size());
  REQUIRE(pieces[0].rows.size() == 1);
  CHECK(pieces[0].rows[0].item == "S-1");
}

TEST_CASE("a file that is renamed in is taken at once") {
  WatchedFolder folder;
  folder.intake.rescan = std::chrono::hours(1);
  folder.intake.settle = std::chrono::hours(1);
  folder.start_watching();
  write_file(folder.temp.path() / "b.csv", csv("S-1"));
  fs::rename(folder.temp.path() / "b.csv", folder.inbox / "b.csv");
  CHECK(folder.comes_to_done("b.csv"));
}

TEST_CASE("a file that was there before the start is taken once it stands still") {
  WatchedFolder folder;
  write_file(folder.inbox / "a.csv", csv("S-1"));
  folder.start();
  CHECK(folder.comes_to_done("a.csv"));
}

TEST_CASE("a half-written file is left alone while its writer pauses, and taken whole when it is closed") {
  WatchedFolder folder;
  folder.limits.unfinished = std::chrono::hours(1);
  folder.start_watching();
  std::ofstream writer(folder.inbox / "a.csv");
  writer << kCsvHeader << csv_row("S-1") << std::flush;
  CHECK(folder.scans_pass(5));  // far longer than `settle`
  CHECK(folder.sink.submitted() == 0);
  CHECK(fs::exists(folder.inbox / "a.csv"));
  writer << csv_row("S-2");
  writer.close();
  CHECK(folder.comes_to_done("a.csv"));
  CHECK(folder.sink.rows() == 2);
  CHECK(folder.sink.submitted() == 1);
}

TEST_CASE("a file that is never closed is taken when it has stood still long enough") {
  WatchedFolder folder;
  folder.start_watching();
  std::ofstream writer(folder.inbox / "a.csv");
  writer << kCsvHeader << csv_row("S-1") << "split,2026-01-05T06:00:00Z,pro" << std::flush;
  const auto from = std::chrono::steady_clock::now();
  CHECK(folder.comes_to_done("a.csv"));
  CHECK(std::chrono::steady_clock::now() - from >= milliseconds(350));
  const auto pieces = folder.sink.pieces();
  REQUIRE(pieces.size() == 1);
  CHECK(pieces[0].rows.size() == 1);
  REQUIRE(pieces[0].bad.size() == 1);
  CHECK(pieces[0].bad[0].reason.find("no line end") != std::string::npos);
}

TEST_CASE("a last line without line end counts in a closed file and waits in one only found") {
  WatchedFolder folder;
  std::string text = csv("S-1") + csv_row("S-2");
  text.pop_back();
  write_file(folder.inbox / "found.csv", text);
  folder.start_watching();
  write_file(folder.inbox / "closed.csv", text + "7");
  CHECK(folder.comes_to_done("closed.csv"));
  CHECK(folder.sink.rows() == 2);
  CHECK(fs::exists(folder.inbox / "found.csv"));
  CHECK(folder.comes_to_done("found.csv"));
  CHECK(folder.sink.rows() == 3);
  CHECK(folder.sink.pieces().back().bad.size() == 1);
}

TEST_CASE("an empty file waits and is then rejected as empty") {
  WatchedFolder folder;
  folder.start_watching();
  const auto from = std::chrono::steady_clock::now();
  write_file(folder.inbox / "a.csv", "");
  CHECK(folder.comes_to_rejected("a.csv"));
  CHECK(std::chrono::steady_clock::now() - from >= milliseconds(350));
  CHECK(read_whole(folder.rejected("a.csv.reason.txt")).find("empty") != std::string::npos);
}

TEST_CASE("an unusable file goes to rejected/ with its reason beside it") {
  WatchedFolder folder;
  folder.start_watching();
  write_file(folder.inbox / "a.csv", "kind;measured_at;measurand;item;value\n");
  write_file(folder.inbox / "garbage.csv", std::string("\x89PNG\0\0\n", 7));
  CHECK(folder.comes_to_rejected("a.csv"));
  CHECK(folder.comes_to_rejected("garbage.csv"));
  CHECK(read_whole(folder.rejected("a.csv.reason.txt")).find("commas") != std::string::npos);
  for (const FilePiece& piece : folder.sink.pieces()) {
    CHECK(piece.unusable != "");
    CHECK(piece.rows.empty());
    CHECK(piece.last);
  }
}

TEST_CASE("a name already in done/ or rejected/ is not overwritten") {
  WatchedFolder folder;
  folder.start_watching();
  for (const char* item : {"S-1", "S-2", "S-3"}) {
    write_file(folder.inbox / "a.csv", csv(item));
    CHECK(eventually([&] { return folder.sink.names().size() == static_cast<std::size_t>(item[2] - '0'); }));
    CHECK(eventually([&] { return !fs::exists(folder.inbox / "a.csv"); }));
  }
  CHECK(read_whole(folder.done("a.csv")) == csv("S-1"));
  CHECK(read_whole(folder.done("a.2.csv")) == csv("S-2"));
  CHECK(read_whole(folder.done("a.3.csv")) == csv("S-3"));
  write_file(folder.inbox / "b", "x\n");
  CHECK(folder.comes_to_rejected("b"));
  write_file(folder.inbox / "b", "y\n");
  CHECK(folder.comes_to_rejected("b.2"));
  CHECK(read_whole(folder.rejected("b")) == "x\n");
  CHECK(fs::exists(folder.rejected("b.reason.txt")));
  CHECK(fs::exists(folder.rejected("b.2.reason.txt")));
}

TEST_CASE("known content is moved to done/") {
  WatchedFolder folder;
  folder.start_watching();
  write_file(folder.inbox / "a.csv", csv("S-1"));
  CHECK(folder.comes_to_done("a.csv"));
  write_file(folder.inbox / "b.csv", csv("S-1"));
  CHECK(folder.comes_to_done("b.csv"));
}

TEST_CASE("names of other programs' work in progress are ignored") {
  WatchedFolder folder;
  folder.start_watching();
  for (const char* name : {".a.csv", "a.csv~", "a.TMP", "a.part", "a.csv.filepart", "~$a.csv"})
    write_file(folder.inbox / name, csv("S-1"));
  fs::create_directory(folder.inbox / "folder.csv");
  CHECK(folder.scans_pass());
  CHECK(folder.sink.submitted() == 0);
  CHECK(folder.sink.state().pending == 0);
  fs::rename(folder.inbox / "a.part", folder.inbox / "a.csv");
  CHECK(folder.comes_to_done("a.csv"));
}

TEST_CASE("names with spaces, newlines and bytes that are no UTF-8 are taken as they are") {
  WatchedFolder folder;
  folder.start_watching();
  for (const std::string& name : {std::string("a b.csv"), std::string("a\nb\x1B[31m.csv"),
                                  std::string("\xFF\xFE.csv"), std::string(251, 'n') + ".csv"}) {
    write_file(folder.inbox / name, csv(std::to_string(name.size())));
    CHECK(folder.comes_to_done(name));
    CHECK(folder.sink.names().back() == name);
  }
  const std::string long_name(255, 'r');
  write_file(folder.inbox / long_name, "x\n");
  CHECK(folder.comes_to_rejected(long_name));
  CHECK(fs::exists(folder.rejected(std::string(244, 'r') + ".reason.txt")));
}

TEST_CASE("symbolic links and pipes are refused, and not followed") {
  WatchedFolder folder;
  folder.start_watching();
  write_file(folder.temp.path() / "outside.csv", csv("S-1"));
  fs::create_symlink(folder.temp.path() / "outside.csv", folder.inbox / "link.csv");
  REQUIRE(::mkfifo((folder.inbox / "pipe.csv").c_str(), 0600) == 0);
  CHECK(eventually([&] { return fs::is_symlink(folder.rejected("link.csv")); }));
  CHECK(eventually([&] { return fs::is_fifo(folder.rejected("pipe.csv")); }));
  CHECK(read_whole(folder.temp.path() / "outside.csv") == csv("S-1"));
  CHECK(folder.sink.rows() == 0);
  CHECK(read_whole(folder.rejected("pipe.csv.reason.txt")).find("no regular file") != std::string::npos);
}

TEST_CASE("a hard link, which is never closed, is taken once it stands still") {
  WatchedFolder folder;
  folder.limits.unfinished = std::chrono::hours(1);
  folder.start_watching();
  write_file(folder.temp.path() / "other.csv", csv("S-1"));
  fs::create_hard_link(folder.temp.path() / "other.csv", folder.inbox / "a.csv");
  CHECK(folder.comes_to_done("a.csv"));
}

TEST_CASE("reject_file refuses the whole file for one bad row and names every one") {
  WatchedFolder folder;
  folder.intake.on_bad_row = BadRowPolicy::reject_file;
  folder.start_watching();
  write_file(folder.inbox / "bad.csv",
             csv("S-1") + "chekc,x,y,z,1\n" + csv_row("S-2") + "split,x,protein,S-3,1\n");
  write_file(folder.inbox / "good.csv", csv("S-1"));
  CHECK(folder.comes_to_rejected("bad.csv"));
  CHECK(folder.comes_to_done("good.csv"));
  CHECK(folder.sink.rows() == 1);
  const std::string reason = read_whole(folder.rejected("bad.csv.reason.txt"));
  CHECK(reason.find("2 bad rows") != std::string::npos);
  CHECK(reason.find("line 3, column 1: kind: \"chekc\"") != std::string::npos);
  CHECK(reason.find("line 5, column 2: measured_at") != std::string::npos);
}

TEST_CASE("keep_good hands over the good rows and the bad ones") {
  WatchedFolder folder;
  folder.start_watching();
  write_file(folder.inbox / "a.csv", csv("S-1") + "nonsense\n" + csv_row("S-2"));
  CHECK(folder.comes_to_done("a.csv"));
  const auto pieces = folder.sink.pieces();
  REQUIRE(pieces.size() == 1);
  CHECK(pieces[0].rows.size() == 2);
  REQUIRE(pieces[0].bad.size() == 1);
  CHECK(pieces[0].bad[0].line == 3);
  CHECK(pieces[0].bad[0].text == "nonsense");
}

TEST_CASE("a file beyond the size limit is refused unread") {
  WatchedFolder folder;
  folder.limits.read.file_bytes = 100;
  folder.start_watching();
  write_file(folder.inbox / "a.csv", csv("S-1") + csv_row("S-2"));
  CHECK(folder.comes_to_rejected("a.csv"));
  CHECK(folder.sink.rows() == 0);
  CHECK(read_whole(folder.rejected("a.csv.reason.txt")).find("at most 100") != std::string::npos);
}

TEST_CASE("files found by a scan are taken in the order of their mtime, then their name") {
  WatchedFolder folder;
  const auto now = fs::file_time_type::clock::now();
  const auto put = [&](const char* name, int seconds_ago) {
    write_file(folder.inbox / name, csv(name));
    fs::last_write_time(folder.inbox / name, now - std::chrono::seconds(seconds_ago));
  };
  put("c.csv", 30);
  put("b.csv", 10);
  put("d.csv", 20);
  put("a.csv", 20);
  folder.start();
  CHECK(eventually([&] { return folder.sink.names().size() == 4; }));
  CHECK(folder.sink.names() == std::vector<std::string>{"c.csv", "a.csv", "d.csv", "b.csv"});
}

TEST_CASE("JSON lines and a JSON array are known by the end of their name") {
  WatchedFolder folder;
  folder.start_watching();
  const std::string object =
      R"({"kind":"split","measured_at":"2026-01-05T06:00:00Z","measurand":"protein","item":"S","value":1})";
  write_file(folder.inbox / "a.jsonl", object + "\n");
  write_file(folder.inbox / "b.JSON", "[" + object + "]");
  CHECK(folder.comes_to_done("a.jsonl"));
  CHECK(folder.comes_to_done("b.JSON"));
  CHECK(folder.sink.rows() == 2);
}
