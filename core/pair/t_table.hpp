#pragma once
// Purpose: one quantile of Student's t for many degrees of freedom, each worked out once.
// Inputs: the upper tail, 0 < tail < 1; df >= 1.
// Accuracy: that of t_quantile_of_tail. Cost: O(1) after the first call for a df.
#include <vector>

namespace agreed {

class TTable {
 public:
  explicit TTable(double tail) : tail_(tail) {}
  /// t with P(T > t) = tail on `df` degrees of freedom.
  [[nodiscard]] double at(int df);

 private:
  double tail_;
  std::vector<double> known_;  ///< by df; negative: not yet
};

}  // namespace agreed
