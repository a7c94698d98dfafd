#include "daemon/engine/work_queue.hpp"

#include <thread>

#include <doctest/doctest.h>

using namespace agreed;
using namespace std::chrono_literals;

namespace {

FilePiece piece(std::uint32_t analyzer, Duration at, std::size_t rows = 1) {
  FilePiece made;
  made.file.analyzer = {analyzer};
  made.rows.resize(rows);
  for (Row& row : made.rows) row.measured_at = Instant{at};
  made.last = true;
  return made;
}

}  // namespace

TEST_CASE("a batch takes the oldest measured_at first, so the analyzers stay in step") {
  WorkQueue queue(2);
  for (const int hour : {1, 4}) (void)queue.put(piece(0, std::chrono::hours(hour)));
  for (const int hour : {2, 3}) (void)queue.put(piece(1, std::chrono::hours(hour)));
  const Work work = queue.take(1s);
  REQUIRE(work.pieces.size() == 4);
  for (int i = 0; i < 4; ++i)
    CHECK(work.pieces[static_cast<std::size_t>(i)].piece.rows[0].measured_at ==
          Instant{std::chrono::hours(i + 1)});
}

TEST_CASE("a batch is bounded in rows and in files") {
  WorkQueue queue(1);
  (void)queue.put(piece(0, 1h, 6'000));
  (void)queue.put(piece(0, 2h, 6'000));
  CHECK(queue.take(1s).pieces.size() == 1);
  CHECK(queue.take(1s).pieces.size() == 1);
  for (int i = 0; i < 1'500; ++i) (void)queue.put(piece(0, 3h));
  CHECK(queue.take(1s).pieces.size() == WorkQueue::kBatchFiles);
  CHECK(queue.take(1s).pieces.size() == 500);
}

TEST_CASE("an analyzer whose part is full waits, another does not") {
  WorkQueue queue(2);
  (void)queue.put(piece(0, 1h, 30'000));
  std::thread blocked([&] { (void)queue.put(piece(0, 2h)); });
  (void)queue.put(piece(1, 1h));  // returns at once
  std::size_t taken = 0;
  while (taken < 3) taken += queue.take(5s).pieces.size();
  blocked.join();
  CHECK(taken == 3);
}

TEST_CASE("stop answers everyone who waits and refuses what comes later") {
  WorkQueue queue(1);
  auto waiting = queue.put(piece(0, 1h));
  std::string failure;
  queue.put(Task{[](Instant) {}, [&](const std::string& why) { failure = why; }});
  queue.stop();
  CHECK_THROWS(waiting.get());
  CHECK_FALSE(failure.empty());
  CHECK_THROWS(queue.put(piece(0, 2h)));
  CHECK_FALSE(queue.put(Task{}));
  CHECK(queue.take(1s).stop);
}

TEST_CASE("nothing to do: take comes back after its patience") {
  WorkQueue queue(1);
  const Work work = queue.take(1ms);
  CHECK(work.pieces.empty());
  CHECK_FALSE(work.tick);
  queue.report({0}, {true, "", 0, true});
  CHECK(queue.take(1s).tick);
  CHECK(queue.inboxes()[0].reachable);
}

TEST_CASE("what waits behind a piece that failed fails too, of that analyzer only") {
  WorkQueue queue(2);
  auto later = queue.put(piece(0, 2h));
  auto other = queue.put(piece(1, 3h));
  queue.refuse_round({0}, 7, "disk full");
  CHECK_THROWS_WITH((void)later.get(), "disk full");
  CHECK(other.wait_for(0s) == std::future_status::timeout);
  CHECK(queue.take(1s).pieces.size() == 1);
}

TEST_CASE("what comes later in the round of a piece that failed fails too, the next round goes on") {
  WorkQueue queue(2);
  const auto put = [&queue](std::uint32_t analyzer, std::uint64_t round) {
    FilePiece made = piece(analyzer, 2h);
    made.round = round;
    return queue.put(std::move(made));
  };
  queue.refuse_round({0}, 7, "disk full");
  CHECK_THROWS_WITH((void)put(0, 7).get(), "disk full");
  const auto other = put(1, 7), next = put(0, 8), alone = put(0, 0);
  CHECK(queue.take(1s).pieces.size() == 3);
}
