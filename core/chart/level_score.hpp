#pragma once
// Change score of the level: is there a moment that splits a stretch into two with different means?
// Hawkins, Qiu and Kang, J. Qual. Technol. 35 (2003) 355. Split after k readings (3 <= k <= n-1):
// B_k = k(n-k)/n (mean after - mean before)^2, t_k = sqrt((n-2) B_k / (S - B_k)) on n-2 degrees of freedom,
// S - B_k not below (n-2) r^2/12 for readings of resolution r. The score is the normal score of the largest
// t_k, with its sign. From 5 readings on; O(readings held).
#include <cstdint>

#include "core/chart/stretch.hpp"

namespace agreed {

constexpr std::int64_t kLeastForLevel = 5;

/// The best split; ties go to the smallest k. Without spread t is 0.
struct LevelSplit {
  std::size_t position = 0;  ///< in the stretch
  std::int64_t before = 0;   ///< k
  std::int64_t count = 0;    ///< n
  double t = 0;              ///< signed: positive, the mean went up
  double residual = 0;       ///< S - B_k, not below its floor

  [[nodiscard]] bool single() const { return before == count - 1; }
};

[[nodiscard]] inline bool has_level_splits(const Stretch& stretch) {
  return stretch.count() >= kLeastForLevel && stretch.held() > 0;
}

/// The stretch has splits.
[[nodiscard]] LevelSplit best_level_split(const Stretch& stretch);

/// Normal score of a split's t.
[[nodiscard]] double level_score(double t, std::int64_t count);

/// Is the score's size above h (> 0)? Special functions only where |t| itself exceeds h, which is rare: a t
/// tail is never lighter than the normal one, so the score is never larger than |t|.
[[nodiscard]] bool level_score_exceeds(double t, std::int64_t count, double h);

/// Does some split still exceed h when the readings' serial correlation, estimated about the two means of
/// `best`, is allowed for? B_k = (difference of means)^2 / (f_k/k + f_(n-k)/(n-k)), f_m the variance of a
/// mean of m readings with lag-1 correlation r, times m.
[[nodiscard]] bool holds_with_serial_correlation(const Stretch& stretch, const LevelSplit& best, double h);

/// Half width, in s_n, of what the reading after n >= 2 readings may be: T(n-1; Phi(h)) sqrt(1 + 1/n).
/// Relative accuracy 1e-9.
[[nodiscard]] double prediction_factor(std::int64_t n, double h);

}  // namespace agreed
