#pragma once
// What simulated pairs are made of: the samples, the true errors of the two analyzers, and the error ratio as
// the service takes it.
#include <string>

#include "core/base/instant.hpp"
#include "core/base/random_normal.hpp"
#include "core/base/settings.hpp"
#include "core/pair/pair.hpp"
#include "core/plan/samples.hpp"

namespace agreed::plan {

struct PairConditions {
  SampleValues samples;
  double sd_x = 0, sd_y = 0;  ///< of the error of one result at the samples' mean value, > 0
  /// lambda with its interval, known, as it is to be expected. How the true errors go
  /// with the level is taken from its models (`x_model`, `y_model`), how large they are from the sds above.
  ErrorRatio ratio;
  int x_replicates = 1, y_replicates = 1;  ///< results a side; errors of replicates are independent

  /// The same with errors `factor` > 0 times as large.
  [[nodiscard]] PairConditions with_errors(double factor) const;
  /// sd of the error of one result at a true value.
  [[nodiscard]] double sd_x_at(double level) const;
  [[nodiscard]] double sd_y_at(double level) const;
  /// sd of y - x of one pair (the means of its replicates) at the samples' mean value: what steps are
  /// compared with.
  [[nodiscard]] double sd_of_pair() const;
};

/// Throws std::invalid_argument unless sds are positive and finite, lambda known, replicates >= 1.
void require_valid(const PairConditions& conditions);

/// The ratio as one service happens to know it: where it is an estimate, with the error of its degrees of
/// freedom.
[[nodiscard]] ErrorRatio ratio_as_known(const ErrorRatio& expected, RandomNormal& draw);

/// One pair at `at`: y is `shift` above what `relation` makes of the true value. Rounded to `resolution` (0:
/// not).
[[nodiscard]] Pair draw_pair(const PairConditions& conditions, const EstablishedLine& relation, double shift,
                             double resolution, Instant at, RandomNormal& draw);

}  // namespace agreed::plan
