#include "core/chart/classical/run_rules.hpp"

#include <algorithm>
#include <bit>
#include <cmath>

namespace agreed::classical {
namespace {
int sign(double value) {
  return value > 0 ? 1 : value < 0 ? -1 : 0;
}

/// A signed count of equal signs in a row, held at `most`.
int counted(int before, int now, int most) {
  if (now == 0) return 0;
  const bool goes_on = before != 0 && (before > 0) == (now > 0);
  return goes_on ? std::clamp(before + now, -most, most) : now;
}

/// Whether this reading is beyond `line` and with it at least `needed` of the newest ones held in `bits`.
bool completes(std::uint8_t& bits, bool beyond, int needed, int held) {
  const int before = std::popcount(bits);
  bits = static_cast<std::uint8_t>(((bits << 1) | (beyond ? 1 : 0)) & ((1 << held) - 1));
  return beyond && before + 1 >= needed;
}
}  // namespace

RulesMet RunRuleMemory::take(double z, const RunRules& rules) {
  RulesMet met;
  if (rules.same_side > 0) {
    side_ = counted(side_, sign(z), rules.same_side);
    met.same_side = std::abs(side_) >= rules.same_side;
  }
  if (rules.trend > 0 || rules.alternating > 0) {
    const int step = has_last_ ? sign(z - last_) : 0;
    if (rules.trend > 0) {
      trend_ = counted(trend_, step, rules.trend - 1);
      met.trend = std::abs(trend_) >= rules.trend - 1;
    }
    if (rules.alternating > 0) {
      const bool turned = step != 0 && step == -last_step_;
      turns_ = step == 0 ? 0 : turned ? std::min(turns_ + 1, rules.alternating - 1) : 1;
      met.alternating = turns_ >= rules.alternating - 1;
      last_step_ = step;
    }
    has_last_ = true;
    last_ = z;
  }
  if (rules.two_of_three_beyond > 0) {
    const double line = rules.two_of_three_beyond;
    const bool above = completes(above_two_, z > line, 2, 2), below = completes(below_two_, z < -line, 2, 2);
    met.two_of_three_beyond = above || below;
  }
  if (rules.four_of_five_beyond > 0) {
    const double line = rules.four_of_five_beyond;
    const bool above = completes(above_four_, z > line, 4, 4),
               below = completes(below_four_, z < -line, 4, 4);
    met.four_of_five_beyond = above || below;
  }
  if (rules.near_centre > 0) {
    near_ = std::abs(z) < 1 ? std::min(near_ + 1, rules.near_centre) : 0;
    met.near_centre = near_ >= rules.near_centre;
  }
  if (rules.away_from_centre > 0) {
    const bool away = std::abs(z) > 1;
    away_ = away ? std::min(away_ + 1, rules.away_from_centre) : 0;
    away_above_ = away && (away_above_ || z > 0);
    away_below_ = away && (away_below_ || z < 0);
    met.away_from_centre = away_ >= rules.away_from_centre && away_above_ && away_below_;
  }
  return met;
}

int RunRuleMemory::readings(const RulesMet& met, const RunRules& rules) const {
  int longest = 0;
  if (met.same_side) longest = std::max(longest, rules.same_side);
  if (met.trend) longest = std::max(longest, rules.trend);
  if (met.two_of_three_beyond) longest = std::max(longest, 3);
  if (met.four_of_five_beyond) longest = std::max(longest, 5);
  if (met.alternating) longest = std::max(longest, rules.alternating);
  if (met.near_centre) longest = std::max(longest, rules.near_centre);
  if (met.away_from_centre) longest = std::max(longest, rules.away_from_centre);
  return longest;
}

}  // namespace agreed::classical
