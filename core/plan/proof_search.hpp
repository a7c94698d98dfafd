#pragma once
// How many pairs are needed to show agreement with a wished power, and where the window does not hold so
// many, what would make do with those it holds. Closed form first (proof_power.hpp), then the rule as it is
// by simulation (proof_simulation.hpp), whose figure counts.
#include <optional>
#include <string_view>
#include <vector>

#include "core/plan/proof_power.hpp"
#include "core/plan/trial.hpp"

namespace agreed::plan {

/// Why agreement cannot be shown with the wished power.
namespace no_proof {
inline constexpr std::string_view no_decision_levels = "no_decision_levels";
inline constexpr std::string_view no_allowable_difference = "no_allowable_difference";
/// The true bias is as large as the allowable difference at a level, or larger.
inline constexpr std::string_view bias_as_large_as_allowable = "bias_as_large_as_allowable";
/// Samples do not reach a level, or so seldom that the window often holds none beyond it.
inline constexpr std::string_view not_covered = "not_covered";
/// More pairs are needed than the window holds.
inline constexpr std::string_view window_too_small = "window_too_small";
}  // namespace no_proof

struct ProofWish {
  double power = 0.9;  ///< in (0, 1)
  double bias = 0;     ///< true y - x, the same at all levels
};

struct ProofNeeds {
  std::vector<ProofAim> aims;  ///< one per decision level
  /// Pairs the window holds: window_pairs, and no more than come within window_age.
  int capacity = 0;
  std::optional<int> pairs;     ///< the least number with the wished power, at most the capacity
  std::string_view reason;      ///< why there is none; empty: there is
  std::optional<double> level;  ///< the level that decides: of least power, or the one that `reason` is about
  Simulated power;              ///< of the rule as it is, at `pairs`, else at the capacity
  double closed_form = 0;       ///< of one look (proof_power.hpp), at the same number
  /// Where the window is too small: pairs needed in a larger one; nothing up to 100,000.
  std::optional<int> pairs_in_larger_window;
  /// Where the window is too small: what alone would reach the wish at its capacity, all else equal; both
  /// analyzers' sds times `sd_factor` < 1, or allowable differences times `allowable_factor` > 1 (this also
  /// where the bias is too large). Closed form, corrected by what the rule as it is lacks at the capacity.
  std::optional<double> sd_factor, allowable_factor;
};

/// Stepwise, so that who waits can be shown how far it is.
class ProofSearch {
 public:
  /// trials.count of them at each number of pairs that is tried, about ten numbers: with 2,000 some tenths of
  /// a second all together. The same streams at each number, so that the luck is the same. Throws
  /// std::invalid_argument as require_valid does, and for a power outside (0, 1) or a bias that is not
  /// finite. `settings` may go.
  ProofSearch(const Settings& settings, ComparisonIndex comparison, const PairConditions& conditions,
              const ProofWish& wish, const Trials& trials);

  /// One more simulation; false when done.
  bool step();
  [[nodiscard]] double share_done() const;
  /// Complete when step() returned false.
  [[nodiscard]] const ProofNeeds& needs() const { return needs_; }

 private:
  [[nodiscard]] const ComparisonSettings& config() const { return settings_.of(comparison_); }
  /// Of one look in closed form, errors and allowable differences times these factors.
  [[nodiscard]] double closed(int pairs, double errors = 1, double allowable = 1) const;
  /// The least number, from `from` on, whose closed form reaches a power; nothing up to `most`.
  [[nodiscard]] std::optional<int> closed_pairs(double power, int from, int most) const;
  [[nodiscard]] std::string_view hindrance();
  void begin();
  void choose_next();
  void conclude(int pairs, Simulated power);
  void explain(int pairs);

  Settings settings_;
  ComparisonIndex comparison_;
  PairConditions conditions_;
  ProofWish wish_;
  Trials trials_;
  ProofNeeds needs_;
  int least_ = 0;
  int too_few_ = 0;  ///< the most pairs known not to be enough; 0: none
  int enough_ = 0;   ///< the fewest known to be; 0: none
  int next_ = 0;     ///< to be tried; 0: done
  Simulated at_enough_, at_too_few_;
  int steps_ = 0;
};

}  // namespace agreed::plan
