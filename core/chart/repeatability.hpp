#pragma once
// Repeatability of an analyzer as a chart of check readings knows it.
#include "core/base/instant.hpp"

namespace agreed {

/// Variance of one reading's error, from a check standard, as it stood after the reading at `at`.
/// degrees_of_freedom 0: not known yet.
///
/// From single readings it is (MRbar/d2)^2. From runs of replicates it has two parts: within_variance, pooled
/// from the runs, and what the run means scatter beyond it (between runs, never below 0), so that the error
/// of a mean of k replicates of one run has variance - within_variance + within_variance / k. Degrees of
/// freedom of the sum after F. E. Satterthwaite, Biometrics Bulletin 2 (1946) 110.
struct Repeatability {
  Instant at{};
  double variance = 0;
  double degrees_of_freedom = 0;
  double mean = 0;                       ///< the level it holds for
  double within_variance = 0;            ///< of replicates of one run
  double within_degrees_of_freedom = 0;  ///< 0: no replicates, how they scatter is not known

  [[nodiscard]] bool known() const { return degrees_of_freedom > 0; }
};

}  // namespace agreed
