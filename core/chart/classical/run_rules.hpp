#pragma once
// Supplementary run rules of a control chart, each by what it says, with its count as configured.
//
// Source: Nelson, J. Qual. Technol. 16 (1984) 237; ISO 7870-2; the first four also Western Electric,
// Statistical Quality Control Handbook (1956). Conventions: z = (value - centre)/sigma; all inequalities are
// strict, so a reading exactly on a line counts on neither side; the reading that completes a pattern
// signals, and so does each further one that goes on with it; for "two of three" and "four of five" the
// completing reading lies beyond the line itself; "away from centre" needs readings on both sides (those all
// on one side are what "four of five" and "same side" find). A pattern does not reach back before the first
// reading.
#include <compare>
#include <cstdint>

#include "core/base/settings.hpp"

namespace agreed::classical {

/// Which rules a reading completes.
struct RulesMet {
  bool same_side = false, trend = false, two_of_three_beyond = false, four_of_five_beyond = false,
       alternating = false, near_centre = false, away_from_centre = false;

  [[nodiscard]] bool any() const {
    return same_side || trend || two_of_three_beyond || four_of_five_beyond || alternating || near_centre ||
           away_from_centre;
  }
};

/// All that the rules need of the readings so far. Rules that are off leave their part untouched, so that the
/// number of states a set of rules can be in is no larger than it must be.
class RunRuleMemory {
 public:
  /// One more reading. `rules`: the counts; 0 = off.
  RulesMet take(double z, const RunRules& rules);

  /// Readings, with the newest, that the pattern of a rule just met rests on, as the longest of those met.
  [[nodiscard]] int readings(const RulesMet& met, const RunRules& rules) const;

  auto operator<=>(const RunRuleMemory&) const = default;

 private:
  int side_ = 0;   ///< so many in a row on one side; negative: below
  int trend_ = 0;  ///< so many steps in a row up; negative: down
  int turns_ = 0;  ///< so many steps in a row, each against the one before
  int near_ = 0, away_ = 0;
  bool away_above_ = false, away_below_ = false;
  std::uint8_t above_two_ = 0, below_two_ = 0;    ///< of the newest two readings, bit 0 the newest
  std::uint8_t above_four_ = 0, below_four_ = 0;  ///< of the newest four
  bool has_last_ = false;
  double last_ = 0;
  int last_step_ = 0;
};

}  // namespace agreed::classical
