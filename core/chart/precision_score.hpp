#pragma once
// Change score of the precision: is there a moment after which the readings scatter more?
// After Hawkins and Zamba, Technometrics 47 (2005) 164. Split after k readings (k >= 5, n-k >= 2),
// F = s2 after / s2 before, normal score by E. Paulson's closed form (1942)
// z = ((1-b) F^(1/3) - (1-a)) / sqrt(b F^(2/3) + a), a = 2/(9(n-k-1)), b = 2/(9(k-1)); neither s2 below
// r^2/12 for readings of resolution r. The score is the largest z; upward only. From 7 readings on;
// O(readings held).
//
// Two variations, both of which leave the law of the score as it is while degrees of freedom count for
// readings: in a new lot of the standard, the scatter carried over from earlier lots is part of what lies
// before every split; where runs of replicates say at least as much as the run means
// (Stretch::by_replicates), the variances are those within runs, pooled, with at least 4 degrees of freedom
// before and 1 after.
#include <cstdint>
#include <vector>

#include "core/chart/stretch.hpp"

namespace agreed {

constexpr std::int64_t kLeastForPrecision = 7;
constexpr std::int64_t kLeastBeforeScatter = 5;

/// The best split; ties go to the smallest k. Without spread F is 1 at every split.
struct PrecisionSplit {
  std::size_t position = 0;
  std::int64_t before = 0;  ///< readings of this stretch
  double score = 0;
  double ratio_of_sd = 1;  ///< after / before
};

[[nodiscard]] bool has_precision_splits(const Stretch& stretch);

/// The first position that leaves enough before it, be it readings or what is carried over.
[[nodiscard]] std::size_t first_scatter_split(const Stretch& stretch);

/// The stretch has splits. `scratch` is room that may be used again.
[[nodiscard]] PrecisionSplit best_precision_split(const Stretch& stretch, std::vector<float>& scratch);

/// Paulson's z for F = `ratio` > 0 on (after-1, before-1) degrees of freedom.
[[nodiscard]] double precision_score(double ratio, std::int64_t before, std::int64_t after);

/// The F at which that z equals h; nothing (infinity) where no F reaches h.
[[nodiscard]] double precision_limit(double h, std::int64_t before, std::int64_t after);

}  // namespace agreed
