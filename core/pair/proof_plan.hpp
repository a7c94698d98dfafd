#pragma once
// Purpose: what would decide a verdict that is inconclusive: how many more pairs, or how much less scatter.
// Inputs: bias, its standard error and the allowable difference at each decision level, in one unit; the
// pairs
//   they rest on; the confidence of the interval that has to lie outside before disagreement is shown.
// Method: own planning by the half width of the interval. The standard error is taken to shrink with
//   1/sqrt(pairs) and the bias to stay what it is; the number is the least for which the decision has a
//   chance of 90 % at one look: Phi((A-|D|)/se - t) - Phi(t - (A+|D|)/se) for agreement with t of the 90 %
//   interval, Phi((|D|-A)/se - t) for disagreement with t of the alert interval (normal form of the power of
//   two one-sided tests, D. J. Schuirmann, J. Pharmacokin. Biopharm. 15 (1987) 657). Agreement needs every
//   level, so the slowest one counts; disagreement needs one, so the fastest does.
// Degenerate: a bias about as large as what is allowable is not decided by any number of pairs worth naming
//   (100,000), and a level that no sample reaches by none: a reason instead of a number.
// Cost: O(levels), a few dozen t quantiles each.
#include <optional>
#include <span>
#include <string_view>

#include "core/pair/comparison_view.hpp"

namespace agreed {

namespace no_plan {
/// More pairs do not help: the bias is about as large as the allowable difference.
inline constexpr std::string_view bias_as_large_as_allowable = "bias_as_large_as_allowable";
/// No sample reaches the level.
inline constexpr std::string_view not_covered = "not_covered";
}  // namespace no_plan

struct LevelEvidence {
  double level = 0, bias = 0, se = 0, allowable = 0;
  bool covered = true;
};

struct ProofPlan {
  std::string_view reason;                 ///< why there is no number; empty: there is one
  double level = 0;                        ///< the decision level that it hangs on
  double bias = 0, allowable = 0;          ///< there
  Verdict aim = Verdict::agreement_shown;  ///< what the present bias points at
  std::optional<int> more_pairs;           ///< 0: one look may decide it any time
  std::optional<double>
      scatter_factor;  ///< residual sd that decides it with the present pairs, over that of now
};

/// `pairs` >= 3, at least one level, 0.5 < alert_confidence < 1.
[[nodiscard]] ProofPlan plan_proof(std::span<const LevelEvidence> levels, int pairs, double alert_confidence);

}  // namespace agreed
