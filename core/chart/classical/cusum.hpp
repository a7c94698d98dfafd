#pragma once
// Two-sided tabular cumulative sum of standardised readings.
//
// upper_i = max(0, upper_(i-1) + z_i - k), lower_i = max(0, lower_(i-1) - z_i - k); a sum above h signals.
// Source: Page, Biometrika 41 (1954) 100; NIST/SEMATECH e-Handbook 6.3.2.3; ISO 7870-4. The sums go on
// through a signal, so after a long fault they need time to come down: an intervention begins them anew.
#include <algorithm>

namespace agreed::classical {

struct Cusum {
  double upper = 0, lower = 0;
  int upper_for = 0, lower_for = 0;  ///< readings since the sum was last 0: a change began there (Page)

  /// allowance k >= 0, in sd of one z.
  void take(double z, double allowance) {
    upper = std::max(0.0, upper + z - allowance);
    lower = std::max(0.0, lower - z - allowance);
    upper_for = upper > 0 ? upper_for + 1 : 0;
    lower_for = lower > 0 ? lower_for + 1 : 0;
  }
  [[nodiscard]] bool beyond(double limit) const { return upper > limit || lower > limit; }
};

}  // namespace agreed::classical
