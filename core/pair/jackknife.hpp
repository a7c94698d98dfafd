#pragma once
// Purpose: standard errors of a Deming line that hold without a model of the errors.
// Inputs: the pairs, their moments and the line through all of them.
// Method: delete-one jackknife (K. Linnet, Stat. Med. 9 (1990) 1463; Clin. Chem. 39 (1993) 424): covariance =
//   (n-1)/n times the sum of squares and products of the n estimates about their mean. All n fits from the
//   moments: S without i = S - n/(n-1) c_i c_i'.
// Assumptions: pairs independent of each other.
// Accuracy: equals n refits to 1e-8 relative or better; a pair that carries nearly all of a sum of squares is
//   refitted from the pairs themselves.
// Degenerate: nothing, when without one of the pairs there is no line.
// Cost: O(n), about 6 ns a pair.
#include <optional>
#include <span>

#include "core/pair/deming.hpp"

namespace agreed {

[[nodiscard]] std::optional<LineCovariance> jackknife_covariance(std::span<const Point> points,
                                                                 const Moments& moments,
                                                                 const DemingLine& line);

}  // namespace agreed
