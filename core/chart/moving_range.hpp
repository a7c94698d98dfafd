#pragma once
// Sigma from the mean moving range (span 2) of readings in time order, and what it is worth.
#include <cstdint>

namespace agreed {

/// E(|v_i - v_(i-1)|) / sigma of independent normal readings, 2/sqrt(pi) (tables print 1.128).
constexpr double kD2 = 1.1283791670955126;

/// Degrees of freedom of MRbar/d2 of n >= 2 readings: the nu whose s has the coefficient of variation of
/// MRbar. Variance of MRbar: Cryer and Ryan, J. Qual. Technol. 22 (1990) 187; the chi with the same
/// coefficient of variation: Patnaik, Biometrika 37 (1950) 78. Relative accuracy 1e-9. About 0.62 (n-1).
[[nodiscard]] double moving_range_degrees_of_freedom(std::int64_t n);

/// (Variance of MRbar) / sigma^2 of n >= 2 readings.
[[nodiscard]] double moving_range_variance(std::int64_t n);

}  // namespace agreed
