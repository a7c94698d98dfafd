#pragma once
// Purpose: the power of `agreement_shown` for n pairs in closed form: the chance that at one look the 90 %
//   intervals of the bias lie inside the allowable difference at every decision level.
// Inputs: samples, errors and true bias; what is allowable at the levels; all in the measurand's unit.
// Method: the bias at a level over its standard error is Student's t on n-2 degrees of freedom; the line has
//   the covariance that is to be expected (expected_line.hpp). One level: two one-sided 5 % tests with an
//   estimated error (Schuirmann 1987), by integration over the chi distribution of the residual sd: what
//   Owen's Q functions give (D. B. Owen, Biometrika 52 (1965) 437; A. Phillips, J. Pharmacokin. Biopharm. 18
//   (1990) 137). All levels: over chi and the error of the slope, for each of which the intervals of all
//   levels are one interval of the error of the mean.
// Accuracy: integrals 1e-7 absolute (one level) and 1e-6 (all). What is left out: the confirmation on several
//   pairs in a row, coverage of the levels, the scatter of the samples drawn and of the jackknife. Without
//   the confirmation that is eight hundredths of power at 25 pairs, three to four at 40 and one at 100 and
//   more; proof_simulation.hpp has it all.
// Cost: one level about 5 us, all about 1 ms.
#include <span>
#include <vector>

#include "core/base/settings.hpp"
#include "core/plan/pair_conditions.hpp"

namespace agreed::plan {

/// What is to be shown: at a decision level |bias| <= allowable.
struct ProofAim {
  double level = 0, allowable = 0;  ///< both in the measurand's unit
};

/// The decision levels of a measurand with what is allowable there; empty without either.
[[nodiscard]] std::vector<ProofAim> proof_aims(const Measurand& measurand);

/// The power of two one-sided tests at `tail` each: P(|d| + t s <= allowable), d normal about `bias` with the
/// true standard error `se` > 0, s that standard error as estimated on `df` > 0 degrees of freedom, t the
/// quantile of `tail`. 0 for an allowable of 0. Throws std::invalid_argument for se or df that are not
/// positive.
[[nodiscard]] double power_of_two_tests(double allowable, double bias, double se, double df,
                                        double tail = 0.05);

struct ProofPower {
  double all = 0;               ///< at all levels at once
  std::vector<double> levels;   ///< at each alone
  std::vector<double> covered;  ///< the chance that the samples reach each level; not in the figures above
};

/// Of one look at `pairs` >= 3 pairs whose true bias is `bias` at every level; `fit`: how the comparison
/// fits. All 0 where there is no such fit. Throws as require_valid does.
[[nodiscard]] ProofPower proof_power(const PairConditions& conditions, std::span<const ProofAim> aims,
                                     FitMethod fit, double bias, int pairs);

}  // namespace agreed::plan
