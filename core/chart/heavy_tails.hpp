#pragma once
// Do the readings have heavier tails than normal ones? Then the level score calls falsely far more often than
// its run length says.
#include <cstdint>
#include <optional>

#include "core/chart/stretch.hpp"

namespace agreed {

constexpr std::int64_t kLeastForTails = 50;

struct HeavyTails {
  double excess = 0;   ///< sample kurtosis m4/m2^2 less 3
  double from = 0;     ///< its 99 % point for as many normal readings
  double degrees = 0;  ///< of the t distribution with that excess, 4 + 6/excess
  std::int64_t readings = 0;
};

/// Kurtosis of the readings held one by one among the first `learned` of the stretch, where it is above its
/// 99 % point for normal readings; nothing below 50 of them. The point after F. J. Anscombe and W. J. Glynn,
/// Biometrika 70 (1983) 227 (from 20 readings on within 0.02 of the published points). O(readings held).
[[nodiscard]] std::optional<HeavyTails> heavy_tails(const Stretch& stretch, std::int64_t learned);

/// The 99 % point of the kurtosis excess of n normal readings.
[[nodiscard]] double kurtosis_point(std::int64_t n);

/// Readings between false signals of the level score at limit h where errors have t tails of so many degrees
/// of freedom: the nearest simulated column (3-statistics 3.2), ln(run length) interpolated in h; beyond
/// h 3.86 to 4.40 the run length of normal readings, less by as much as at the end of the table.
[[nodiscard]] double run_length_with_tails(double degrees, double h);

}  // namespace agreed
