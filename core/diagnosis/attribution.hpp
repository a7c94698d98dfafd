#pragma once
// Purpose: which of two analyzers moved, and how probable that is.
// Inputs: three independent estimates over the same before and after, each with its standard error, in the
//   measurand's unit: the shift d of the pairs (of y - slope x), the shifts a and b of the check standards on
//   x and on y. a or b may be missing.
// Method: own, Bayes' rule. Four explanations, a prior quarter each: x moved, (a, b, d) = (s, 0, -slope s);
//   y moved, (0, s, s); both moved, each by its own shift; neither moved and the samples differ, (0, 0, s).
//   Every free shift ~ N(0, tau^2), tau = max(|d|, 2 se_d), so each marginal likelihood is a normal density
//   with covariance diag(se^2) + tau^2 G G', G the explanation's columns. A missing estimate is left out.
// Assumptions: normal estimates with known standard errors (see check_shift.hpp for few readings); shifts of
//   the size that the pairs show.
// Accuracy: probabilities to 1e-10. How often it is right: over steps of 1, 2 and 3 standard deviations of a
//   reading with 3 to 20 check readings after them, 98 to 99 % of the claims (from 0.9 up) are right, and no
//   range of probabilities promises more than it keeps. A step of 1 with 3 readings after it leads to a
//   claim in 2 % of cases, and of those fewer are right than they say: such shifts are below what the check
//   readings can see.
// Degenerate: nothing moved and nothing is uncertain (d = se_d = 0): a quarter each.
// Cost: O(1), below a microsecond.
#include <array>
#include <optional>

#include "core/pair/comparison_view.hpp"

namespace agreed {

struct Shift {
  double value = 0;
  double se = 0;  ///< >= 0
};

struct ShiftEstimates {
  Shift pairs;
  std::optional<Shift> x, y;
  double slope = 1;  ///< of the line of the pairs, > 0
};

/// The four explanations, in the order of `Moved`.
struct Attribution {
  std::array<double, 4> probability{};  ///< of x, y, both, neither

  [[nodiscard]] Moved most_probable() const;
  [[nodiscard]] double largest() const;
};

[[nodiscard]] Attribution attribute(const ShiftEstimates& shifts);

/// What an explanation expects the check standards to have shifted by, all estimates taken into account.
struct ExpectedChecks {
  double x = 0, y = 0;
};
[[nodiscard]] ExpectedChecks expected_checks(const ShiftEstimates& shifts, Moved explanation);

}  // namespace agreed
