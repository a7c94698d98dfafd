#pragma once
// How many pairs are needed to show agreement with a wished power, and where no window holds so many, what
// would make do with fewer. Closed form first (proof_power.hpp), then the rule as it is by simulation.
#include <optional>
#include <string_view>
#include <vector>

#include "core/plan/proof_power.hpp"

namespace agreed::plan {

/// Why agreement cannot be shown with the wished power.
namespace no_proof {
inline constexpr std::string_view no_decision_levels = "no_decision_levels";
inline constexpr std::string_view no_allowable_difference = "no_allowable_difference";
/// The true bias is as large as the allowable difference at a level, or larger.
inline constexpr std::string_view bias_as_large_as_allowable = "bias_as_large_as_allowable";
/// Samples do not reach a level, or so few do that the window seldom holds one.
inline constexpr std::string_view not_covered = "not_covered";
/// More pairs than the window holds are needed.
inline constexpr std::string_view window_too_small = "window_too_small";
}  // namespace no_proof

struct ProofWish {
  double power = 0.9;  ///< in (0, 1)
  double bias = 0;     ///< true y - x, the same at all levels
};

struct ProofNeeds {
  std::vector<ProofAim> aims;   ///< one per decision level
  std::optional<int> pairs;     ///< the least number with the wished power, within what the window holds
  std::string_view reason;      ///< why there is none; empty: there is
  std::optional<double> level;  ///< the level that decides: of least power, or the one that is not covered
  /// Pairs the window holds: window_pairs, and no more than come within window_age.
  int capacity = 0;
  Simulated power;         ///< of the rule as it is, at `pairs`, else at the capacity
  double closed_form = 0;  ///< of one look, at the same number
  /// Where the window is too small (closed form, nothing beyond 100,000 pairs): pairs needed in a larger one.
  std::optional<int> pairs_in_larger_window;
  /// Where the window is too small: what single change would reach the wish at its capacity (closed form).
  /// Both analyzers' sds times `sd_factor` < 1; allowable differences times `allowable_factor` > 1.
  std::optional<double> sd_factor, allowable_factor;
};

/// Stepwise, so that who waits can be shown how far it is.
class ProofSearch {
 public:
  /// trials.count of them at each number of pairs that is tried (about ten numbers); 2,000 take some tenths
  /// of a second all together. Throws std::invalid_argument as require_valid does, and for a power outside
  /// (0, 1) or a bias that is not finite.
  ProofSearch(const Settings& settings, ComparisonIndex comparison, const PairConditions& conditions,
              const ProofWish& wish, const Trials& trials);

  /// One more simulation; false when done.
  bool step();
  [[nodiscard]] double share_done() const;
  /// Complete when step() returned false.
  [[nodiscard]] const ProofNeeds& needs() const { return needs_; }

 private:
  void begin();
  void conclude(int pairs, Simulated power);
  void say_what_would_do();

  Settings settings_;
  ComparisonIndex comparison_;
  PairConditions conditions_;
  ProofWish wish_;
  Trials trials_;
  ProofNeeds needs_;
  // Pairs known not to be enough, known to be (0: none yet), to be tried next (0: done).
  int too_few_ = 0, enough_ = 0, next_ = 0;
  Simulated power_of_enough_;
  int steps_ = 0;
};

}  // namespace agreed::plan
