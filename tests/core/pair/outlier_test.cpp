#include "core/pair/outlier.hpp"

#include <doctest/doctest.h>

#include "core/base/distributions.hpp"

using namespace agreed;

namespace {
HeldPair flagged(std::int64_t serial, double residual) {
  return {Pair{"S-" + std::to_string(serial), {}, 1, 1}, serial, residual, 30};
}
}  // namespace

TEST_CASE("flagged is what a run length of the share says, two-sided") {
  OutlierPolicy policy(1000);
  const double limit = t_quantile_of_tail(0.0005, 30);
  CHECK_FALSE(policy.flags(0.999 * limit, 30));
  CHECK(policy.flags(1.001 * limit, 30));
  CHECK(policy.flags(-1.001 * limit, 30));
  CHECK_FALSE(policy.flags(1e9, 0));
  CHECK_FALSE(OutlierPolicy(0).flags(1e9, 30));
}

TEST_CASE("one flagged pair is given up after two more") {
  OutlierPolicy policy(1000);
  CHECK(policy.admit_or_hold(flagged(1, 5)).empty());
  CHECK(policy.give_up(1).empty());
  policy.accepted(2);
  CHECK(policy.give_up(2).empty());
  policy.accepted(3);
  const auto gone = policy.give_up(3);
  REQUIRE(gone.size() == 1);
  CHECK(gone[0].serial == 1);
  CHECK(gone[0].accepted_later == 2);
  CHECK(policy.held().empty());
}

TEST_CASE("a second one on the same side, next or next but one, admits both") {
  for (const std::int64_t second : {2, 3}) {
    OutlierPolicy policy(1000);
    CHECK(policy.admit_or_hold(flagged(1, 5)).empty());
    CHECK(policy.give_up(1).empty());
    if (second == 3) {
      policy.accepted(2);
      CHECK(policy.give_up(2).empty());
    }
    const auto admitted = policy.admit_or_hold(flagged(second, 6));
    REQUIRE(admitted.size() == 1);
    CHECK(admitted[0].serial == 1);
    CHECK(admitted[0].accepted_later == second - 2);
    CHECK(policy.held().empty());
  }
}

TEST_CASE("one on the other side is held beside it, each with its own chances") {
  OutlierPolicy policy(1000);
  CHECK(policy.admit_or_hold(flagged(1, 5)).empty());
  CHECK(policy.give_up(1).empty());
  CHECK(policy.admit_or_hold(flagged(2, -5)).empty());
  CHECK(policy.give_up(2).empty());
  const auto admitted = policy.admit_or_hold(flagged(3, -6));
  REQUIRE(admitted.size() == 1);
  CHECK(admitted[0].serial == 2);
  const auto gone = policy.give_up(3);
  REQUIRE(gone.size() == 1);
  CHECK(gone[0].serial == 1);
}

TEST_CASE("at the end of a stretch nobody can speak for them") {
  OutlierPolicy policy(1000);
  CHECK(policy.admit_or_hold(flagged(1, 5)).empty());
  CHECK(policy.admit_or_hold(flagged(2, -5)).empty());
  CHECK(policy.give_up_all().size() == 2);
  CHECK(policy.held().empty());
}
