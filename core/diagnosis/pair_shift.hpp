#pragma once
// Purpose: by how much the relation of the pairs moved at a moment: the shift of y against the line.
// Inputs: the pairs before and after it, as moments in the measurand's unit; delta of the pairs.
// Method: own. One Deming slope of both sides, from the sums of squares about the mean of each, so that the
//   step itself does not tilt it; shift = difference of the means of y - slope x; variance = s^2 (1/k +
//   1/(n-k)) + (difference of the means of x)^2 V(slope), s^2 on n - 3 degrees of freedom and Fuller's V;
//   widened by df / (df - 2) as in check_shift.hpp.
//   Held against an established line, too few pairs before the moment do no harm: shift = mean residual of
//   the pairs after it from that line, s^2 = their scatter along its slope on n - 1 degrees of freedom.
// Assumptions: pairs independent, error of constant variance; a proportional change counts with its mean.
// Degenerate: without a line of positive slope, slope 1; fewer than 3 degrees of freedom or an empty side:
//   nothing.
// Cost: O(1).
#include <optional>

#include "core/base/settings.hpp"
#include "core/diagnosis/attribution.hpp"
#include "core/pair/moments.hpp"

namespace agreed {

struct PairShift {
  Shift shift;
  double slope = 1;
};

/// `resolution` of the results, 0 when not known.
[[nodiscard]] std::optional<PairShift> pair_shift(const Moments& before, const Moments& after, double delta,
                                                  double resolution);

/// Against an established line.
[[nodiscard]] std::optional<PairShift> shift_from_line(const EstablishedLine& line, const Moments& after,
                                                       double resolution);

}  // namespace agreed
