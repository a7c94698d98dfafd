#pragma once
// Control-chart constants, computed and not read from tables: what the range and the standard deviation of n
// normal readings are worth as estimates of sigma.
//
// Source: the definitions (ISO 7870-2; ASTM Manual 7). d2 and d3 from the distribution function of the range,
// P(W <= w) = n * integral of f(x) (F(x + w) - F(x))^(n-1) dx (Tippett, Biometrika 17 (1925) 364).
// Accuracy: 1e-9 relative for d2, d3, 1e-12 for c4. Printed tables round d2 and d3 before they make D4 of
// them and so differ from these in the third decimal.

namespace agreed::classical {

/// Mean and standard deviation of the range of n readings, in sigma.
struct RangeConstants {
  double d2 = 0, d3 = 0;
};

/// n >= 2, else std::domain_error. Up to 25 from a table made at the first call (about 20 ms), above it
/// worked out at each call (about 1 ms).
[[nodiscard]] RangeConstants range_constants(int n);

/// Mean of the standard deviation of n readings, in sigma; n >= 2, else std::domain_error.
[[nodiscard]] double c4(int n);

/// Limits of a chart lie so many standard deviations from its centre line (ISO 7870-2).
inline constexpr double kLimitWidth = 3;

/// Moving ranges above so many times their mean signal: D4 for n = 2, 1 + 3 sqrt(pi/2 - 1), printed 3.267.
inline constexpr double kMovingRangeLimit = 3.2665319192886013;

}  // namespace agreed::classical
