#pragma once
// One split sample measured on both analyzers, and the error variances it is judged by.
#include <cstdint>
#include <string>
#include <vector>

#include "core/base/index.hpp"
#include "core/base/instant.hpp"
#include "core/pair/error_model.hpp"

namespace agreed {

struct Pair {
  std::string sample;
  Instant at;           ///< the later of the two sides' first results
  double x = 0, y = 0;  ///< means of the replicates
  int x_replicates = 1, y_replicates = 1;
  double x_squares = 0, y_squares = 0;  ///< sums of squares of the replicates about their means
};

/// Error variance of single results of one analyzer, pooled or at a level.
struct ErrorVariance {
  double variance = 0;
  double degrees_of_freedom = 0;  ///< 0: not known
  bool operator==(const ErrorVariance&) const = default;
};

/// lambda = var(x error) / var(y error) of single results, with its 95 % interval. `known` is false while
/// there is nothing to take it from; `reason` then says why.
struct ErrorRatio {
  bool known = false;
  std::string reason;
  double lambda = 1, low = 1, high = 1;
  bool variances_known = false;  ///< false for a bare lambda from the configuration
  ErrorVariance x, y;
  bool estimated = false;  ///< lambda is an estimate, so its own uncertainty counts in standard errors
  /// How the errors go with the level. While they are constant lambda says all; else lambda, `x` and `y` are
  /// those at `level`, and the models are known in proportion only when `variances_known` is false.
  ErrorModel x_model, y_model;
  double level = 0;

  [[nodiscard]] ErrorGrowth growth() const { return x_model.growth; }
  /// Variance of the x error of a single result at a level, to be used as a weight: at least in proportion.
  [[nodiscard]] double x_variance_at(double at) const { return x_model.variance_at(at); }

  bool operator==(const ErrorRatio&) const = default;
};

}  // namespace agreed
