#include "core/plan/weakest_change.hpp"

#include <vector>

#include <doctest/doctest.h>

#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;

namespace {
/// Told at once with that chance, else never.
Candidate told_with(double chance) {
  return {
      [chance](RandomNormal& draw, int) { return draw.uniform() < chance ? std::optional(1) : std::nullopt; },
      10};
}

const Trials kTrials{400, 10, 1};
}  // namespace

TEST_CASE("the weakest change with which half the trials are told") {
  for (const int border : {1, 7, 40, 63, 99}) {
    std::vector<int> tried;
    WeakestChange search(
        100,
        [&](int i) {
          tried.push_back(i);
          return told_with(i < border ? 0.2 : 0.8);
        },
        kTrials);
    double done = 0;
    while (search.step()) {
      CHECK(search.share_done() >= done);
      done = search.share_done();
    }
    CHECK(search.share_done() == 1);
    REQUIRE(search.found());
    CHECK(*search.found() == border);
    CHECK(search.share().value > 0.7);
    CHECK(tried.size() <= 10);
  }
}

TEST_CASE("what is found is confirmed with all trials, and near one half made stronger until it holds") {
  WeakestChange search(
      101, [](int i) { return told_with(i / 100.0); }, kTrials);
  finish(search);
  REQUIRE(search.found());
  CHECK(*search.found() >= 44);
  CHECK(*search.found() <= 60);
  CHECK(search.share().value >= 0.5);
}

TEST_CASE("nothing to choose from, nothing enough, or everything") {
  WeakestChange none(0, {}, kTrials);
  CHECK_FALSE(none.step());
  CHECK(none.share_done() == 1);
  CHECK_FALSE(none.found());
  WeakestChange weak(
      50, [](int) { return told_with(0.1); }, kTrials);
  finish(weak);
  CHECK_FALSE(weak.found());
  WeakestChange strong(
      50, [](int) { return told_with(0.9); }, kTrials);
  finish(strong);
  CHECK(strong.found() == 0);
  WeakestChange single(
      1, [](int) { return told_with(0.9); }, kTrials);
  finish(single);
  CHECK(single.found() == 0);
}

TEST_CASE("a change with which no reading comes in time is not enough") {
  WeakestChange search(
      10,
      [](int i) {
        return i < 6 ? Candidate{{}, 0} : told_with(1);
      },
      kTrials);
  finish(search);
  CHECK(search.found() == 6);
}
