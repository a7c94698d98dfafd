#pragma once
// Repeatability of an analyzer as a chart of check readings knows it.
#include "core/base/instant.hpp"

namespace agreed {

/// Variance of one reading's error, from a check standard, as it stood after the reading at `at`.
/// degrees_of_freedom 0: not known yet.
struct Repeatability {
  Instant at{};
  double variance = 0;
  double degrees_of_freedom = 0;
  double mean = 0;  ///< the level it holds for

  [[nodiscard]] bool known() const { return degrees_of_freedom > 0; }
};

}  // namespace agreed
