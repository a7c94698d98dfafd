// Halves that find no partner: told once, when their time has passed, of the analyzer that measured them.
#include "core/alert/lonely_halves.hpp"

#include <set>

#include <doctest/doctest.h>

#include "core/alert/details.hpp"

using namespace agreed;
using std::chrono::hours;
using std::chrono::minutes;

namespace {

constexpr Instant kStart{std::chrono::sys_days{std::chrono::year{2026} / 1 / 5}};

/// Three analyzers; line1 is compared with both others.
Settings three_lines() {
  Settings settings;
  settings.analyzers = {{"line1", ""}, {"line2", ""}, {"line3", ""}};
  settings.measurands = {{"moisture", "", "", {}, {}, {}}, {"protein", "", "", {}, {}, {}}};
  ComparisonSettings first, second;
  first.id = "line1-line2";
  second.id = "line1-line3";
  first.measurand = second.measurand = {1};
  first.x = second.x = {0};
  first.y = {1};
  second.y = {2};
  second.pair_within = hours(48);
  settings.comparisons = {first, second};
  return settings;
}

SplitReading half(std::uint32_t analyzer, const std::string& sample, std::uint32_t measurand = 1) {
  return {kStart, {analyzer}, sample, {measurand}, 0, 11.2};
}

/// What the monitor would say: pairs of these samples are there.
struct Partners {
  bool operator()(ComparisonIndex comparison, const SplitReading& result) const {
    return !paired.contains({comparison.value, result.sample});
  }
  std::set<std::pair<std::uint32_t, std::string>> paired;
};

}  // namespace

TEST_CASE("a half is told of once, after its time, with others of its analyzer") {
  const Settings settings = three_lines();
  LonelyHalves halves(settings);
  const Partners none;
  halves.add(half(1, "S-1"), kStart);
  halves.add(half(1, "S-2"), kStart + minutes(1));
  halves.add(half(2, "S-3"), kStart + minutes(2));
  halves.settle(none);
  CHECK(halves.due(kStart + hours(24), none).empty());
  const auto first = halves.due(kStart + hours(24) + minutes(5), none);
  REQUIRE(first.size() == 1);
  CHECK(first[0].kind == AlertKind::unpaired_samples);
  CHECK(first[0].subject == Subject{.analyzer = "line2"});
  CHECK(first[0].severity == Severity::notice);
  CHECK(first[0].holds);
  CHECK(list_in(first[0].details, "items") == std::vector<std::string>{"S-1", "S-2"});
  CHECK(halves.due(kStart + hours(25), none).empty());
  const auto second = halves.due(kStart + hours(49), none);
  REQUIRE(second.size() == 1);
  CHECK(second[0].subject.analyzer == "line3");
  CHECK(halves.due(kStart + hours(99), none).empty());
}

TEST_CASE("a partner in any of its comparisons is enough, whether it comes before or after") {
  const Settings settings = three_lines();
  LonelyHalves halves(settings);
  Partners partners;
  partners.paired = {{0, "S-1"}};
  halves.add(half(0, "S-1"), kStart);  // line1 and line2 measured it, line3 was not meant to
  halves.add(half(0, "S-2"), kStart);
  halves.add(half(0, "S-3"), kStart);
  halves.settle(partners);
  partners.paired.insert({1, "S-2"});
  CHECK(halves.due(kStart + hours(48), partners).empty());
  const auto due = halves.due(kStart + hours(49), partners);
  REQUIRE(due.size() == 1);
  CHECK(list_in(due[0].details, "items") == std::vector<std::string>{"S-3"});
}

TEST_CASE("a replicate that comes later starts no new wait; what no comparison is about is not waited for") {
  const Settings settings = three_lines();
  LonelyHalves halves(settings);
  const Partners none;
  halves.add(half(1, "S-1"), kStart);
  halves.settle(none);
  halves.add(half(1, "S-1"), kStart + hours(20));
  halves.add(half(1, "S-1", 0), kStart);
  halves.settle(none);
  const auto due = halves.due(kStart + hours(25), none);
  REQUIRE(due.size() == 1);
  CHECK(list_in(due[0].details, "items") == std::vector<std::string>{"S-1"});
  CHECK(halves.due(kStart + hours(99), none).empty());
  halves.add(half(1, "S-1"), kStart + hours(100));
  halves.settle(none);
  CHECK(halves.due(kStart + hours(125), none).size() == 1);
}

TEST_CASE("what waits is bounded: the oldest is not told of") {
  const Settings settings = three_lines();
  LonelyHalves halves(settings);
  const Partners none;
  for (std::size_t i = 0; i < LonelyHalves::kCapacity + 10; ++i) {
    halves.add(half(1, "S-" + std::to_string(i)), kStart);
    halves.settle(none);
  }
  const auto due = halves.due(kStart + hours(25), none);
  REQUIRE(due.size() == 1);
  const auto items = list_in(due[0].details, "items");
  CHECK(items.size() == LonelyHalves::kCapacity);
  CHECK(items.front() == "S-10");
  halves.add(half(1, "S-5"), kStart);
  halves.clear();
  CHECK(halves.due(kStart + hours(99), none).empty());
}
