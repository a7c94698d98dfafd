#pragma once
// What the runs of a baseline say of the centre line and of sigma (ISO 7870-2, ch. on charts without given
// values).
#include <optional>

#include "core/base/settings.hpp"
#include "core/chart/classical/run.hpp"

namespace agreed::classical {

/// Where the limits of a chart come from, of one reading.
struct LimitBasis {
  double center = 0, sigma = 0;
  bool within_runs = false;  ///< sigma is that of the replicates of a run
};

/// Sums over the runs of a baseline; constant size.
class Baseline {
 public:
  void add(const Run& run, RunSpread spread);

  [[nodiscard]] int runs() const { return runs_; }

  /// Centre: mean of the run means. Sigma: where at least half of the runs are replicated, from the spread
  /// within them: mean of range/d2 (or sd/c4) over the runs, each weighted by the inverse of its relative
  /// variance, so equally where all runs are of one size (Burr, J. Qual. Technol. 1 (1969) 163); else mean
  /// moving range of successive run means / d2. Nothing while there are less than 2 runs or nothing varies.
  [[nodiscard]] std::optional<LimitBasis> basis() const;

 private:
  int runs_ = 0, replicated_ = 0;
  double first_ = 0, previous_ = 0;
  double sum_ = 0;     ///< of run means less the first one
  double ranges_ = 0;  ///< moving ranges of run means
  double within_ = 0, within_weight_ = 0;
};

}  // namespace agreed::classical
