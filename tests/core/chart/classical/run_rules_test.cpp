// Which reading completes which run rule.
#include "core/chart/classical/run_rules.hpp"

#include <vector>

#include <doctest/doctest.h>

using namespace agreed;
using namespace agreed::classical;

namespace {
using Numbers = std::vector<int>;

RunRules all_with(int same_side) {
  RunRules rules;
  rules.same_side = same_side;
  rules.trend = 6;
  rules.two_of_three_beyond = 2;
  rules.four_of_five_beyond = 1;
  rules.alternating = 14;
  rules.near_centre = 15;
  rules.away_from_centre = 8;
  return rules;
}

/// Numbers, from 1, of the readings that complete each rule.
struct Met {
  Numbers same_side, trend, two_of_three, four_of_five, alternating, near_centre, away;
  explicit Met(const std::vector<double>& z, int same_side_count = 9) {
    RunRuleMemory memory;
    for (std::size_t i = 0; i < z.size(); ++i) {
      const RulesMet met = memory.take(z[i], all_with(same_side_count));
      const int number = static_cast<int>(i) + 1;
      if (met.same_side) same_side.push_back(number);
      if (met.trend) trend.push_back(number);
      if (met.two_of_three_beyond) two_of_three.push_back(number);
      if (met.four_of_five_beyond) four_of_five.push_back(number);
      if (met.alternating) alternating.push_back(number);
      if (met.near_centre) near_centre.push_back(number);
      if (met.away_from_centre) away.push_back(number);
    }
  }
  void check(const Met& only) const {
    CHECK(same_side == only.same_side);
    CHECK(trend == only.trend);
    CHECK(two_of_three == only.two_of_three);
    CHECK(four_of_five == only.four_of_five);
    CHECK(alternating == only.alternating);
    CHECK(near_centre == only.near_centre);
    CHECK(away == only.away);
  }
};
const Met kNone{{}};
}  // namespace

// Sequences made up for the purpose, worked out by hand and by an independent program; the rules are Western
// Electric 1956 (eight on one side) and Nelson 1984 (nine).
TEST_CASE("each rule is completed by the reading the definitions name, and no other rule with it") {
  Met expected = kNone;
  Met({0.1, -0.4, 0.7, -1.2, 3.2, 0.3, -0.6}).check(expected);

  expected = kNone, expected.two_of_three = {5};
  Met({0.2, -0.3, 2.3, 0.4, 2.1, -0.5, -2.2, -0.1, 0.2, -2.4}).check(expected);

  expected = kNone, expected.four_of_five = {6, 11};
  Met({0.5, 1.2, 1.4, -0.2, 1.1, 1.3, 0.4, -1.1, -1.5, -1.2, -1.3}).check(expected);

  const std::vector<double> nine = {-0.3, 0.2, 0.4, 0.1, 0.8, 0.3, 0.9, 0.2, 0.5, 0.6, -0.7};
  expected = kNone, expected.same_side = {10};
  Met(nine).check(expected);
  expected.same_side = {9, 10};
  Met(nine, 8).check(expected);

  expected = kNone, expected.trend = {6, 7};
  Met({-1.4, -0.9, -0.5, -0.1, 0.3, 0.8, 1.3, 0.2, -0.3}).check(expected);

  expected = kNone, expected.alternating = {14, 15}, expected.near_centre = {15};
  Met({0.3, -0.5, 0.4, -0.6, 0.7, -0.2, 0.5, -0.8, 0.6, -0.3, 0.2, -0.4, 0.9, -0.1, 0.8}).check(expected);

  expected = kNone, expected.near_centre = {15};
  Met({0.1, -0.2, 0.3, 0.5, -0.6, 0.2, -0.9, 0.8, 0.4, -0.3, 0.1, 0.7, -0.5, -0.1, 0.2, 1.6}).check(expected);

  expected = kNone, expected.away = {8};
  Met({1.2, -1.3, 1.5, 1.1, -1.4, -1.2, 1.3, -1.6, 0.2}).check(expected);

  Met({0.4, -0.7, 1.1, -0.2, 0.9, -1.3, 0.3, -0.5, 1.2, -0.4}).check(kNone);
}

TEST_CASE("what lies exactly on a line counts on neither side") {
  CHECK(Met({1, 1, 1, 0, 1, 1, 1, 1, 1, 1, 1, 1}).same_side.empty());
  CHECK(Met({2, 2, 2, 2}).two_of_three.empty());
  CHECK(Met({1, 1, 1, 1, 1}).four_of_five.empty());
  CHECK(Met(std::vector<double>(20, 1.0)).near_centre.empty());
  CHECK(Met(std::vector<double>(20, -1.0)).away.empty());
  CHECK(Met({0.1, 0.2, 0.3, 0.3, 0.4, 0.5, 0.6}).trend.empty());
}

TEST_CASE("away from the centre needs both sides") {
  CHECK(Met(std::vector<double>(12, 1.5)).away.empty());
  CHECK(Met({1.5, 1.5, 1.5, 1.5, 1.5, 1.5, 1.5, -1.5}).away == Numbers{8});
}

TEST_CASE("every rule has its mirror image") {
  const std::vector<double> z = {0.5, 1.2, 1.4, -0.2, 2.1, 2.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.1, -1.3};
  std::vector<double> mirrored;
  for (const double value : z) mirrored.push_back(-value);
  Met(z).check(Met(mirrored));
  CHECK_FALSE(Met(z).trend.empty());
}

TEST_CASE("a rule that is off remembers nothing") {
  RunRuleMemory memory;
  RunRules rules;
  CHECK_FALSE(memory.take(5, rules).any());
  CHECK(memory == RunRuleMemory{});
}
