#pragma once
// Purpose: the covariance that a fit through n simulated pairs is to be expected to have, before any is
//   measured.
// Inputs: the samples, the errors, how the comparison fits.
// Method: while errors are the same for all, Fuller's covariance (1987, theorem 1.3.1) of the moments to be
//   expected; else that of a weighted straight line of y - x on the level, each sample at its variance
//   (sandwich form, so that weights need not match the errors).
// Assumptions: slope near 1; the spread of n samples is the one to be expected.
// Degenerate: `exists` is false where the weights do not (errors proportional to a level at or below 0).
// Cost: O(samples).
#include "core/pair/deming.hpp"
#include "core/plan/pair_conditions.hpp"

namespace agreed::plan {

struct ExpectedLine {
  bool exists = true;
  double mean_x = 0;
  LineCovariance covariance;  ///< of (y - x at mean_x, slope)
  double slope = 1;           ///< not 1 where the ratio differs from that of the true errors
};

/// n >= 3.
[[nodiscard]] ExpectedLine expected_line(const PairConditions& conditions, FitMethod fit, int pairs);

}  // namespace agreed::plan
