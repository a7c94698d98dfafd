#include "core/monitor/pairing.hpp"

#include <algorithm>
#include <optional>
#include <random>

#include <doctest/doctest.h>

using namespace agreed;
using namespace std::chrono_literals;

namespace {

constexpr Duration kDay = 24h;

Instant at(Duration since_midnight) {
  return Instant{since_midnight};
}

SampleRows rows(std::vector<SideRow> x, std::vector<SideRow> y) {
  SampleRows all;
  for (const SideRow& row : x) all.add(true, row);
  for (const SideRow& row : y) all.add(false, row);
  return all;
}

}  // namespace

TEST_CASE("one result on each side is a pair, timed by the later one") {
  const auto pairs = pairs_of("S-1", rows({{at(1h), 0, 11.2}}, {{at(2h), 0, 11.3}}), kDay);
  REQUIRE(pairs.size() == 1);
  CHECK(pairs[0].at == at(2h));
  CHECK(pairs[0].x == 11.2);
  CHECK(pairs[0].y == 11.3);
}

TEST_CASE("replicates are averaged and the first one gives the time") {
  const auto pairs = pairs_of(
      "S-1", rows({{at(1h), 0, 11.0}, {at(3h), 0, 11.5}, {at(1h), 1, 11.1}}, {{at(2h), 0, 11.3}}), kDay);
  REQUIRE(pairs.size() == 1);
  CHECK(pairs[0].x == doctest::Approx(11.2).epsilon(1e-15));
  CHECK(pairs[0].x_replicates == 3);
  // 0.2, 0.1 and 0.3 off their mean.
  CHECK(pairs[0].x_squares == doctest::Approx(0.14).epsilon(1e-12));
  CHECK(pairs[0].y_squares == 0.0);
  CHECK(pairs[0].at == at(2h));
}

TEST_CASE("a sample id that comes again much later pairs with its own time, nearest first") {
  const auto pairs =
      pairs_of("S-1", rows({{at(0h), 0, 1}, {at(40h), 0, 2}}, {{at(41h), 0, 3}, {at(23h), 0, 4}}), 20h);
  REQUIRE(pairs.size() ==
          1);  // 23h and 41h are one half (18 h apart); 40h is nearer to 23h than 0h is, within 20 h
  CHECK(pairs[0].x == 2);
  CHECK(pairs[0].y_replicates == 2);
}

TEST_CASE("halves too far apart do not pair") {
  CHECK(pairs_of("S-1", rows({{at(0h), 0, 1}}, {{at(25h), 0, 2}}), kDay).empty());
  CHECK(pairs_of("S-1", rows({{at(0h), 0, 1}}, {}), kDay).empty());
}

TEST_CASE("the pairs of a sample do not depend on the order its rows came in") {
  std::mt19937 random(20260105);
  for (int run = 0; run < 200; ++run) {
    std::vector<std::pair<bool, SideRow>> all;
    const int count = 1 + static_cast<int>(random() % 8);
    for (int i = 0; i < count; ++i)
      all.push_back({random() % 2 == 0,
                     {at(std::chrono::hours(random() % 60)), i, static_cast<double>(random() % 100)}});
    std::vector<std::vector<Pair>> found;
    for (int order = 0; order < 4; ++order) {
      SampleRows sample;
      for (const auto& [to_x, row] : all) sample.add(to_x, row);
      found.push_back(pairs_of("S", sample, kDay));
      std::shuffle(all.begin(), all.end(), random);
    }
    for (const auto& pairs : found) {
      REQUIRE(pairs.size() == found[0].size());
      for (std::size_t i = 0; i < pairs.size(); ++i) {
        CHECK(pairs[i].at == found[0][i].at);
        CHECK(pairs[i].x == found[0][i].x);
        CHECK(pairs[i].y == found[0][i].y);
      }
    }
  }
}

TEST_CASE("a half lacks a partner while nothing near enough is left for it, and not when it was taken back") {
  const SampleRows two_on_x = rows({{at(1h), 0, 1}, {at(2h), 1, 1}, {at(40h), 0, 1}}, {{at(41h), 0, 1}});
  CHECK(lacks_partner(two_on_x, true, at(1h), kDay));
  CHECK(lacks_partner(two_on_x, true, at(2h), kDay));  // a replicate of the same half
  CHECK_FALSE(lacks_partner(two_on_x, true, at(40h), kDay));
  CHECK_FALSE(lacks_partner(two_on_x, false, at(41h), kDay));
  CHECK_FALSE(lacks_partner(two_on_x, true, at(3h), kDay));    // no row of it
  CHECK_FALSE(lacks_partner(two_on_x, false, at(40h), kDay));  // it is the other side's
  CHECK(lacks_partner(rows({{at(0h), 0, 1}}, {{at(25h), 0, 1}}), true, at(0h), kDay));
}

TEST_CASE("of all halves of a side, those in a pair and those without a partner are all") {
  std::mt19937 random(11);
  for (int round = 0; round < 300; ++round) {
    SampleRows sample;
    for (int i = 0, count = static_cast<int>(random() % 9); i < count; ++i)
      sample.add(random() % 2 == 0, {at(Duration(random() % 12) * 3'600'000), i, 1.0});
    const Duration within = 2h;
    const auto pairs = pairs_of("S", sample, within).size();
    for (const bool on_x : {true, false}) {
      std::size_t halves = 0, lonely = 0;
      std::optional<Instant> first;
      for (const SideRow& row : on_x ? sample.x : sample.y) {
        if (!first || row.at - *first > within) {
          first = row.at;
          ++halves;
          lonely += lacks_partner(sample, on_x, row.at, within);
        }
        CHECK(lacks_partner(sample, on_x, row.at, within) == lacks_partner(sample, on_x, *first, within));
      }
      CHECK(halves == pairs + lonely);
    }
  }
}

TEST_CASE("the memory counts what waits, forgets the oldest and says so") {
  SampleMemory memory(kDay);
  const auto name = [](std::size_t i) { return "S-" + std::to_string(i); };
  memory.put(name(0), rows({{at(1h), 0, 1}}, {}), false);
  CHECK(memory.waiting() == 1);
  memory.put(name(0), rows({{at(1h), 0, 1}}, {{at(2h), 0, 1}}), true);
  CHECK(memory.waiting() == 0);
  CHECK_FALSE(memory.may_have_forgotten(at(1h)));
  for (std::size_t i = 1; i <= SampleMemory::kCapacity; ++i)
    memory.put(name(i), rows({{at(1000h + i * 1s), 0, 1}}, {}), false);
  CHECK(memory.find(name(0)) == nullptr);
  CHECK(memory.find(name(1)) != nullptr);
  CHECK(memory.waiting() == static_cast<std::int64_t>(SampleMemory::kCapacity));
  CHECK(memory.may_have_forgotten(at(60h)));
  CHECK_FALSE(memory.may_have_forgotten(at(100h)));
}
