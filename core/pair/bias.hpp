#pragma once
// Purpose: the bias of y against x at a level, how sure it is, and what that says about an allowable
//   difference.
// Inputs: a line and its covariance; levels and allowable differences in the measurand's unit, allowable >=
// 0. Method: D(L) = b0 + (b1 - 1) L with its standard error in centred form; two one-sided 5 % tests = the 90
// %
//   interval (D. J. Schuirmann, J. Pharmacokin. Biopharm. 15 (1987) 657); joint test of intercept 0 and slope
//   1: F = t' V^-1 t / 2 on (2, n-2).
// Assumptions: D(L) over its standard error follows Student's t on n-2 degrees of freedom.
// Degenerate: a standard error of zero (an exact line) gives an interval of no width; a covariance without an
//   inverse gives p = 1 for the identity line itself and 0 for any other.
// Cost: O(1).
#include "core/pair/deming.hpp"

namespace agreed {

/// Of each of the two one-sided tests.
inline constexpr double kPlainTail = 0.05;

struct Bias {
  double value = 0;  ///< of y - x at the level
  double se = 0;
};

[[nodiscard]] Bias bias_at(const DemingLine& line, const LineCovariance& covariance, double level);

/// Where an interval lies: inside +-allowable, wholly above or below it, or across a limit of it. An interval
/// that ends on a limit lies inside.
enum class Position { inside, above, below, across };

/// Of bias +- t * se.
[[nodiscard]] Position position_of(Bias bias, double t, double allowable);

/// p of the joint test of intercept 0 and slope 1, n >= 3.
[[nodiscard]] double identity_p(const DemingLine& line, const LineCovariance& covariance, int n);

/// Of single samples: the share that differ by no more than `allowable`, and the limits that hold 95 % of the
/// differences. `residual_variance` >= 0 is of the difference at the level, on `df` degrees of freedom.
struct SingleResult {
  double share_within = 0, low = 0, high = 0;
};
[[nodiscard]] SingleResult single_result(double bias, double residual_variance, int df, double allowable);

}  // namespace agreed
