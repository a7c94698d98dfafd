#pragma once
// Purpose: keep one gross pair out of the line without hiding a step of the relation.
// Inputs: each pair's studentised residual against the line without it, when there is a line.
// Method: own. Tested once, on arrival: two-sided p < 1 / run length on Student's t with n-3 degrees of
//   freedom, n counting the pair. A flagged pair is held out; if one of the next two pairs is flagged on the
//   same side, all of them are admitted (it was a step); else it is set aside.
// Degenerate: a run length of 1 or less: nothing is flagged.
// Cost: O(1) a pair.
#include <cstdint>
#include <vector>

#include "core/pair/pair.hpp"
#include "core/pair/t_table.hpp"

namespace agreed {

/// A flagged pair whose fate is open.
struct HeldPair {
  Pair pair;
  std::int64_t serial = 0;
  double residual = 0;  ///< studentised, at arrival
  int df = 0;
  int chances = 2;         ///< pairs that may still speak for it
  int accepted_later = 0;  ///< pairs taken into the line since
};

class OutlierPolicy {
 public:
  explicit OutlierPolicy(double run_length);

  /// Whether a studentised residual on `df` degrees of freedom is flagged.
  [[nodiscard]] bool flags(double residual, int df);

  /// The next pair was flagged: those held on its side, now admitted; empty: it is held itself.
  [[nodiscard]] std::vector<HeldPair> admit_or_hold(const HeldPair& flagged);

  /// The next pair has been dealt with: those held before it that nobody can speak for any more.
  [[nodiscard]] std::vector<HeldPair> give_up(std::int64_t serial_of_next);
  /// The stretch ends: all that are held.
  [[nodiscard]] std::vector<HeldPair> give_up_all();

  /// A pair was taken into the line: the held ones measured before it count it.
  void accepted(std::int64_t serial);
  [[nodiscard]] const std::vector<HeldPair>& held() const { return held_; }

 private:
  bool active_;
  TTable limits_;
  std::vector<HeldPair> held_;  ///< oldest first
};

}  // namespace agreed
