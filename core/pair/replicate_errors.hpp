#pragma once
// Purpose: the error ratio from the replicates of the split samples themselves.
// Inputs: pairs with the sums of squares of their replicates about their means.
// Method: variance within samples pooled by degrees of freedom, k - 1 a sample and side; of errors
//   proportional to the level the squares are first divided by the squared mean of the sample.
// Assumptions: replicates are repeated under the conditions between which the analyzers are compared.
// Repeated
//   at once they say nothing of what changes between runs, and lambda is that of the repeatability alone.
// Degenerate: `reason` says so when either side has no replicates, or they never differ.
// Cost: O(1) a pair.
#include "core/pair/pair.hpp"

namespace agreed {

class ReplicatePool {
 public:
  /// `growth`: constant or proportional.
  explicit ReplicatePool(ErrorGrowth growth) : growth_(growth) {}

  void add(const Pair& pair);
  [[nodiscard]] ErrorRatio ratio() const;

 private:
  struct Side {
    double squares = 0, df = 0;
    void add(int replicates, double sum_of_squares, double unit);
  };
  [[nodiscard]] ErrorModel model_of(const Side& side) const;

  ErrorGrowth growth_;
  Side x_, y_;
  double levels_ = 0;
  int pairs_ = 0;
};

}  // namespace agreed
