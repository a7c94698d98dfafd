#pragma once
// Purpose: a second opinion on the line that no single pair can pull: slope and intercept by ranks.
// Inputs: pairs in the measurand's unit, in time order; confidence of the intervals.
// Method: H. Passing and W. Bablok, J. Clin. Chem. Clin. Biochem. 21 (1983) 709. Slopes S_ij = (y_i - y_j) /
//   (x_i - x_j) of all pairs of pairs i < j: equal pairs are left out, x_i = x_j gives plus or minus infinity
//   by the sign of y_i - y_j, slopes of -1 are left out. Of the N slopes kept, K are below -1; the slope is
//   the median shifted by K. C = z sqrt(n (n-1) (2n+5) / 18), M1 = (N - C) / 2 rounded to a whole number,
//   M2 = N - M1 + 1; the limits of the slope are the slopes of ranks M1 + K and M2 + K. Intercept = median of
//   y - slope x; its limits are those medians at the upper and the lower limit of the slope.
// Assumptions: a straight line; errors of the same form on both sides, their ratio that of the slope squared
//   (unlike Deming's line it takes no lambda); no weights, so pairs of replicates count like any other.
// Accuracy: what is equal is equal but for the rounding of the values (4 units of the last place), since
//   results are decimals and differences of decimals are not exact. Slope to 1e-15 relative.
// Degenerate: fewer than 3 pairs, or a median that is not finite (x hardly varies): a reason. Too few pairs
//   for a rank interval, or a limit that is not finite: no interval.
// Cost: O(n^2): 500,000 slopes for 1,000 pairs, about 10 ms and 1 MB; on request only.
#include <optional>
#include <span>
#include <string_view>

#include "core/pair/comparison_view.hpp"
#include "core/pair/moments.hpp"

namespace agreed {

/// Why there is no such line.
namespace no_robust_line {
inline constexpr std::string_view too_few_pairs = "too_few_pairs";
inline constexpr std::string_view no_slope = "no_slope";  ///< x hardly varies
}  // namespace no_robust_line

struct PassingBablok {
  std::string_view reason;
  double slope = 1, intercept = 0;
  std::optional<Interval> slope_interval, intercept_interval;

  [[nodiscard]] bool exists() const { return reason.empty(); }
};

/// 0 < confidence < 1.
[[nodiscard]] PassingBablok passing_bablok(std::span<const Point> points, double confidence);

/// y - x on such a line at a level, with its limits: the intercept and its limits as they would be if levels
/// were counted from there. Of a line that exists and has a slope interval.
struct RobustBias {
  double value = 0;
  Interval interval{};
};
[[nodiscard]] RobustBias robust_bias_at(std::span<const Point> points, const PassingBablok& line,
                                        double level);

}  // namespace agreed
