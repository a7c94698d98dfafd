#pragma once
// Purpose: the power of `agreement_shown` for n pairs: the chance that at every decision level the 90 %
//   interval of the bias lies inside the allowable difference and the level is covered, on `confirm` pairs in
//   a row.
// Method: in closed form for one look at n pairs, and by simulation for the rule as it is.
//   Closed form: the bias at a level over its standard error is Student's t on n-2 degrees of freedom; the
//   line has the covariance that is to be expected of such samples and errors (Fuller 1987, theorem 1.3.1;
//   with errors that grow, weighted least squares of y - x on the level). One level: two one-sided 5 % tests
//   with an estimated error (Schuirmann 1987), the chance by integration over the chi distribution of the
//   residual sd: what Owen's Q functions give (D. B. Owen, Biometrika 52 (1965) 437; A. Phillips, J.
//   Pharmacokin. Biopharm. 18 (1990) 137). All levels together: over chi and the error of the slope, in which
//   the intervals of all levels are one interval of the mean difference. Simulation: pairs are drawn, the
//   service's own fit (core/pair/window_fit.hpp) with jackknife is made at the last `confirm` pairs.
// Accuracy: closed form 1e-6 absolute under its assumptions; it leaves out the confirmation (one to three
//   hundredths of power where it matters), coverage, and the jackknife's own scatter. The simulation's
//   standard error comes with it.
// Cost: closed form about 0.2 ms, simulation about 20 us a trial of 100 pairs.
#include <optional>
#include <span>
#include <string_view>
#include <vector>

#include "core/base/settings.hpp"
#include "core/plan/pair_conditions.hpp"
#include "core/plan/trial.hpp"

namespace agreed::plan {

/// What is to be shown: at each decision level |bias| <= allowable.
struct ProofAim {
  double level = 0, allowable = 0;  ///< both in the measurand's unit, allowable > 0
};

/// The decision levels of a measurand with what is allowable there; empty without either.
[[nodiscard]] std::vector<ProofAim> proof_aims(const Measurand& measurand);

/// The power of two one-sided tests at `tail` each: P(|d| + t se < allowable) of an estimate with the true
/// standard error `se` > 0 (known up to a factor that is estimated on `df` >= 1 degrees of freedom).
[[nodiscard]] double power_of_two_tests(double allowable, double bias, double se, double df,
                                        double tail = 0.05);

struct ProofPower {
  double all = 0;               ///< at all levels at once
  std::vector<double> levels;   ///< at each alone
  std::vector<double> covered;  ///< the chance that the samples reach each level; not in the figures above
};

/// Closed form, of one look at `pairs` >= 3 pairs whose true bias is `bias` at every level. `fit`: as
/// configured.
[[nodiscard]] ProofPower proof_power(const PairConditions& conditions, std::span<const ProofAim> aims,
                                     double bias, int pairs);

/// The same by simulation, of the rule as it is: all levels covered and shown on `confirm` pairs in a row,
/// the `pairs`-th the last; 0 below the least number of pairs that the comparison asks for. The samples'
/// results are rounded to the configured decimals. trials.horizon is not used.
[[nodiscard]] Simulated simulated_proof_power(const Settings& settings, ComparisonIndex comparison,
                                              const PairConditions& conditions, double bias, int pairs,
                                              const Trials& trials);

}  // namespace agreed::plan
