#pragma once
// Purpose: one number for how near the pairs lie to the line of identity.
// Inputs: pairs in the measurand's unit.
// Method: concordance correlation coefficient of L. I-K. Lin, Biometrics 45 (1989) 255: 2 Sxy / (Sxx + Syy +
//   (mean x - mean y)^2), variances and covariance with the divisor n.
// Assumptions: none for the number; it grows with the range of the samples, so it says nothing about what is
//   allowable.
// Degenerate: fewer than 2 pairs, or no spread and no difference: nothing.
// Cost: O(1) from the moments.
#include <optional>

#include "core/pair/moments.hpp"

namespace agreed {

[[nodiscard]] std::optional<double> concordance(const Moments& moments);

}  // namespace agreed
