#include "core/diagnosis/pair_shift.hpp"

#include <algorithm>
#include <cmath>

#include "core/pair/deming.hpp"
#include "core/pair/window_fit.hpp"

namespace agreed {
namespace {
constexpr int kSpentDegrees = 3;  // two means, one slope
constexpr int kLeastShiftDegrees = 3;

// The scatter within both sides, as if of one lot of pairs with the degrees of freedom that are left.
Moments within(const Moments& before, const Moments& after) {
  Moments both = before;
  both.n = before.n + after.n - 1;
  both.sxx += after.sxx;
  both.sxy += after.sxy;
  both.syy += after.syy;
  return both;
}

double scatter_along(const Moments& pairs, double slope) {
  return pairs.syy - 2 * slope * pairs.sxy + slope * slope * pairs.sxx;
}

double widened(double variance, int df) {
  return std::sqrt(variance * df / (df - 2));
}
}  // namespace

std::optional<PairShift> pair_shift(const Moments& before, const Moments& after, double delta,
                                    double resolution) {
  const int df = before.n + after.n - kSpentDegrees;
  if (before.n < 1 || after.n < 1 || df < kLeastShiftDegrees) return std::nullopt;
  const Moments both = within(before, after);
  const DemingLine line = deming_line(both, delta);
  const bool usable = line.exists() && line.slope > 0;
  const double slope = usable ? line.slope : 1;
  const double s2 = std::max(scatter_along(both, slope) / df, least_variance(both, slope, resolution));

  const double step_x = (after.origin.x - before.origin.x) + (after.mean.x - before.mean.x);
  const double step_y = (after.origin.y - before.origin.y) + (after.mean.y - before.mean.y);
  double variance = s2 * (1.0 / before.n + 1.0 / after.n);
  if (usable) variance += step_x * step_x * analytic_covariance(both, line, s2, 0).slope;
  return PairShift{{step_y - slope * step_x, widened(variance, df)}, slope};
}

std::optional<PairShift> shift_from_line(const EstablishedLine& line, const Moments& after,
                                         double resolution) {
  const int df = after.n - 1;
  if (df < kLeastShiftDegrees) return std::nullopt;
  const double s2 =
      std::max(scatter_along(after, line.slope) / df, least_variance(after, line.slope, resolution));
  const double shift = after.mean_difference() - line.intercept - (line.slope - 1) * after.mean_x();
  return PairShift{{shift, widened(s2 / after.n, df)}, line.slope};
}

}  // namespace agreed
