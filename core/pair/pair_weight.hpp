#pragma once
// Purpose: how much a pair counts in the pair chart when errors grow with the level or results are means of
//   replicates.
// Inputs: a pair, and the error ratio with its models at that moment.
// Method: weight = (1 + lambda) V(reference level) / ((1/ky + lambda/kx) V(L)), V = variance of the x error
// of a
//   single result by the model, kx and ky = replicates, L = (lambda y + x) / (1 + lambda): the pair's level
//   as measured, so that the weight does not depend on any line. 1 for single results while the errors are
//   constant, exactly.
// Assumptions: a slope not far from 1; both analyzers' errors grow alike (lambda is the same at every level).
// Degenerate: where the model's variance vanishes (proportional errors at level zero) it counts as a
// millionth
//   of that at the reference level.
// Cost: O(1).
#include "core/pair/pair.hpp"

namespace agreed {

[[nodiscard]] double level_of(const Pair& pair, double lambda);

/// > 0 and finite.
[[nodiscard]] double weight_of(const Pair& pair, const ErrorRatio& ratio);

}  // namespace agreed
