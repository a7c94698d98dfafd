#pragma once
// Lag-1 correlation of a stretch's readings, from those held one by one.
#include <cstddef>
#include <optional>

#include "core/chart/stretch.hpp"

namespace agreed {

/// sum (v_i - m)(v_(i+1) - m) / sum (v_i - m)^2 of the held readings up to position `end` about their mean m,
/// the published lag-1 correlation; nothing below 3 readings or without spread.
[[nodiscard]] std::optional<double> serial_correlation(const Stretch& stretch, std::size_t end);

/// The same about two means, split at `position` and without the product across it, plus (1 + 4r)/n against
/// its bias, held in [0, 0.9]: what the level score allows for. 0 without spread.
[[nodiscard]] double residual_correlation(const Stretch& stretch, std::size_t position);

/// Readings between false signals of the level score, not allowing for serial correlation, that has a run
/// length of 1,800 with independent readings (simulated, 3-statistics 3.2; ln(run length) interpolated,
/// beyond 0.6 that of 0.6).
constexpr double kUncorrelatedRunLength = 1800;
[[nodiscard]] double run_length_if_correlated(double lag_1);

}  // namespace agreed
