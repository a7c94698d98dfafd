#pragma once
// Lag-1 correlation of a stretch's readings, from those held one by one.
#include <cstddef>
#include <optional>

#include "core/chart/stretch.hpp"

namespace agreed {

/// sum (v_i - m)(v_(i+1) - m) / sum (v_i - m)^2 of the held readings up to position `end` about their mean m;
/// nothing below 3 readings or without spread.
[[nodiscard]] std::optional<double> serial_correlation(const Stretch& stretch, std::size_t end);

/// The same about two means, split at `position` and without the product across it, plus (1 + 4r)/n against
/// its bias, held in [0, 0.9].
[[nodiscard]] double residual_correlation(const Stretch& stretch, std::size_t position);

}  // namespace agreed
