// When a file has settled, told with made-up times.
#include "daemon/intake/waiting_files.hpp"

#include <doctest/doctest.h>

using namespace agreed;
using namespace std::chrono_literals;

namespace {

FileStamp stamp(std::uint64_t size, std::int64_t mtime_ns = 0) {
  FileStamp made;
  made.inode = 7;
  made.size = size;
  made.mtime_ns = mtime_ns;
  return made;
}

struct Waiting {
  WaitingFiles files{2s, 60s};
  Tick start{};

  [[nodiscard]] Tick at(std::chrono::milliseconds after) const { return start + after; }
  /// Names due then.
  std::vector<std::string> due(std::chrono::milliseconds after) {
    std::vector<std::string> names;
    for (const auto& [name, file] : files.take_due(at(after))) names.push_back(name);
    return names;
  }
};
using Names = std::vector<std::string>;

}  // namespace

TEST_CASE("a close or a renaming settles a file at once") {
  Waiting waiting;
  waiting.files.see("a", stamp(5), Notice::created, waiting.at(0s));
  CHECK(waiting.due(1s).empty());
  waiting.files.see("a", stamp(9), Notice::closed, waiting.at(3s));
  waiting.files.see("b", stamp(9), Notice::renamed_in, waiting.at(3s));
  CHECK(waiting.due(3s) == Names{"a", "b"});
  CHECK(waiting.due(4s).empty());  // they are with whoever took them
}

TEST_CASE("a file seen being written is settled after 60 s without change") {
  Waiting waiting;
  waiting.files.see("a", stamp(5), Notice::created, waiting.at(0s));
  waiting.files.see("a", stamp(6), Notice::scan, waiting.at(30s));
  CHECK(waiting.due(89s).empty());
  CHECK(waiting.files.next_due() == waiting.at(90s));
  CHECK(waiting.due(90s) == Names{"a"});
}

TEST_CASE("a file only found by scans is settled when it stood still for settle") {
  Waiting waiting;
  waiting.files.see("a", stamp(5, 1), Notice::scan, waiting.at(0s));
  waiting.files.see("a", stamp(5, 2), Notice::scan, waiting.at(1s));  // same size, another mtime
  CHECK(waiting.due(2s).empty());
  waiting.files.see("a", stamp(5, 2), Notice::scan, waiting.at(2s));
  CHECK(waiting.due(3s) == Names{"a"});
}

TEST_CASE("a file found to have changed when it was due waits again") {
  Waiting waiting;
  waiting.files.see("a", stamp(5), Notice::scan, waiting.at(0s));
  CHECK(waiting.due(2s) == Names{"a"});
  waiting.files.changed("a", stamp(6), waiting.at(2s));
  CHECK(waiting.due(3900ms).empty());
  CHECK(waiting.due(4s) == Names{"a"});
}

TEST_CASE("a file that changes after its close waits for the next close") {
  Waiting waiting;
  waiting.files.see("a", stamp(5), Notice::closed, waiting.at(0s));
  CHECK(waiting.due(0s) == Names{"a"});
  waiting.files.changed("a", stamp(6), waiting.at(0s));
  CHECK(waiting.due(30s).empty());
  waiting.files.see("a", stamp(7), Notice::closed, waiting.at(31s));
  CHECK(waiting.due(31s) == Names{"a"});
}

TEST_CASE("an empty file waits 60 s, however it came") {
  for (const Notice notice : {Notice::scan, Notice::created, Notice::closed, Notice::renamed_in}) {
    Waiting waiting;
    waiting.files.see("a", stamp(0), notice, waiting.at(0s));
    CHECK(waiting.due(59s).empty());
    CHECK(waiting.due(60s) == Names{"a"});
  }
}

TEST_CASE("an incomplete file is put back until it has stood still for 60 s") {
  Waiting waiting;
  waiting.files.see("a", stamp(5), Notice::scan, waiting.at(0s));
  CHECK(waiting.due(2s) == Names{"a"});
  CHECK(waiting.files.wait_unfinished("a", waiting.at(2s)));
  CHECK(waiting.due(59s).empty());
  CHECK(waiting.due(60s) == Names{"a"});
  CHECK_FALSE(waiting.files.wait_unfinished("a", waiting.at(60s)));
}

TEST_CASE("a file whose commit failed is due again at the next scan and not before") {
  Waiting waiting;
  waiting.files.see("a", stamp(5), Notice::closed, waiting.at(0s));
  CHECK(waiting.due(0s) == Names{"a"});
  waiting.files.retry_at_scan("a");
  CHECK(waiting.due(500s).empty());
  CHECK(waiting.files.size() == 1);
  waiting.files.see("a", stamp(5), Notice::scan, waiting.at(501s));
  CHECK(waiting.due(501s) == Names{"a"});
}

TEST_CASE("when events were lost, a file whose close was awaited need only stand still") {
  Waiting waiting;
  waiting.files.see("a", stamp(5), Notice::created, waiting.at(0s));
  waiting.files.events_lost(waiting.at(1s));
  CHECK(waiting.due(2s).empty());
  CHECK(waiting.due(3s) == Names{"a"});
}

TEST_CASE("what a scan does not show is forgotten, unless it is being taken") {
  Waiting waiting;
  for (const char* name : {"gone", "taken", "there"})
    waiting.files.see(name, stamp(5), Notice::created, waiting.at(0s));
  waiting.files.see("taken", stamp(5), Notice::closed, waiting.at(0s));
  CHECK(waiting.due(0s) == Names{"taken"});
  waiting.files.begin_scan();
  waiting.files.see("there", stamp(5), Notice::scan, waiting.at(1s));
  waiting.files.end_scan();
  CHECK(waiting.files.size() == 2);
  CHECK(waiting.due(100s) == Names{"there"});
}

TEST_CASE("a newer file waits for an older one that a scan found, and they come in order") {
  Waiting waiting;
  waiting.files.see("reading", stamp(5, 1), Notice::scan, waiting.at(0s));
  waiting.files.see("void", stamp(5, 2), Notice::renamed_in, waiting.at(1s));
  waiting.files.see("backfill", stamp(5, 0), Notice::renamed_in, waiting.at(1s));
  CHECK(waiting.due(1s) == Names{"backfill"});  // older than what waits
  CHECK(waiting.files.next_due() == waiting.at(2s));
  CHECK(waiting.due(2s) == Names{"reading", "void"});
}

TEST_CASE("an older file that is still being written, empty or unfinished holds nothing up") {
  Waiting waiting;
  waiting.files.see("written", stamp(5, 1), Notice::scan, waiting.at(0s));
  waiting.files.see("written", stamp(6, 2), Notice::scan, waiting.at(1s));
  waiting.files.see("created", stamp(6, 2), Notice::created, waiting.at(1s));
  waiting.files.see("empty", stamp(0, 2), Notice::scan, waiting.at(1s));
  waiting.files.see("unfinished", stamp(5, 2), Notice::scan, waiting.at(-2s));
  CHECK(waiting.due(1s) == Names{"unfinished"});
  CHECK(waiting.files.wait_unfinished("unfinished", waiting.at(1s)));
  waiting.files.see("new", stamp(5, 3), Notice::closed, waiting.at(1s));
  CHECK(waiting.due(1s) == Names{"new"});
}

TEST_CASE(
    "a newer file waits for an older one that could not be committed, but not for one that cannot be read") {
  Waiting waiting;
  waiting.files.see("a", stamp(5, 1), Notice::closed, waiting.at(0s));
  CHECK(waiting.due(0s) == Names{"a"});
  SUBCASE("could not be committed") {
    waiting.files.retry_at_scan("a", true);
    waiting.files.see("b", stamp(5, 2), Notice::closed, waiting.at(1s));
    CHECK(waiting.due(1s).empty());
    CHECK_FALSE(waiting.files.next_due());  // the next scan is what they wait for
    waiting.files.begin_scan();
    waiting.files.see("b", stamp(5, 2), Notice::scan, waiting.at(3s));
    waiting.files.see("a", stamp(5, 1), Notice::scan, waiting.at(3s));
    waiting.files.end_scan();
    CHECK(waiting.due(3s) == Names{"a", "b"});
  }
  SUBCASE("cannot be read") {
    waiting.files.retry_at_scan("a");
    waiting.files.see("b", stamp(5, 2), Notice::closed, waiting.at(1s));
    CHECK(waiting.due(1s) == Names{"b"});
  }
}
