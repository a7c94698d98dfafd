#pragma once
// Exponentially weighted moving average of standardised readings, with its exact limits.
//
// E_i = w z_i + (1 - w) E_(i-1), E_0 = 0; var E_i = w/(2 - w) (1 - (1 - w)^(2i)) exactly, not its limit for
// large i. Source: Roberts, Technometrics 1 (1959) 239; Lucas and Saccucci, Technometrics 32 (1990) 1;
// ISO 7870-6. Assumes independent z of unit variance about the centre.
#include <cmath>

namespace agreed::classical {

struct Ewma {
  double value = 0;      ///< E_i, in sd of one z
  double forgotten = 1;  ///< (1 - w)^(2i)
  int on_side = 0;       ///< readings since E was last on the other side of the centre: a change began there
                         ///< (Nishina, Technometrics 34 (1992) 382)

  /// 0 < weight <= 1.
  void take(double z, double weight) {
    const bool above = value > 0;
    value = weight * z + (1 - weight) * value;
    on_side = above == (value > 0) ? on_side + 1 : 1;
    forgotten *= (1 - weight) * (1 - weight);
  }
  /// Half width of the limits: `width` standard deviations of E_i.
  [[nodiscard]] double limit(double weight, double width) const {
    return width * std::sqrt(weight / (2 - weight) * (1 - forgotten));
  }
};

}  // namespace agreed::classical
