#pragma once
// Change score of the level: is there a moment that splits a stretch into two with different means?
// Hawkins, Qiu and Kang, J. Qual. Technol. 35 (2003) 355. Split after k readings (3 <= k <= n-1):
// B_k = k(n-k)/n (mean after - mean before)^2, t_k = sqrt((n-2) B_k / (S - B_k)) on n-2 degrees of freedom,
// S - B_k not below (n-2) r^2/12 for readings of resolution r. The score is the normal score of the largest
// t_k, with its sign. From 5 readings on; O(readings held). Its limit: run_length.hpp, level_limit_at.
//
// In a new lot of the standard, the scatter carried over from earlier lots (C, on c degrees of freedom) is
// added: t_k on n-2+c degrees of freedom with S - B_k + C for S - B_k. Readings 2 to 4 are then asked alone
// whether they fit those before them (k = n-1), which their limits show.
#include <algorithm>
#include <cstdint>

#include "core/chart/stretch.hpp"

namespace agreed {

constexpr std::int64_t kLeastForLevel = 5;

/// The best split; ties go to the smallest k. Without spread t is 0. `counted`: n + c, t is on two less.
struct LevelSplit {
  std::size_t position = 0;  ///< in the stretch
  std::int64_t before = 0;   ///< k
  std::int64_t count = 0;    ///< n
  std::int64_t counted = 0;
  double t = 0;         ///< signed: positive, the mean went up
  double residual = 0;  ///< S - B_k + C, not below its floor

  [[nodiscard]] bool single() const { return before == count - 1; }
};

[[nodiscard]] inline bool has_level_splits(const Stretch& stretch) {
  return stretch.count() >= 2 && stretch.counted() >= kLeastForLevel && stretch.held() > 0;
}

/// The first position that is a split.
[[nodiscard]] inline std::size_t first_level_split(const Stretch& stretch) {
  constexpr std::int64_t kLeastBefore = 3;
  return stretch.first_split(std::min(kLeastBefore, stretch.count() - 1));
}

/// The stretch has splits.
[[nodiscard]] LevelSplit best_level_split(const Stretch& stretch);

/// Normal score of a split's t, on counted - 2 degrees of freedom.
[[nodiscard]] double level_score(double t, std::int64_t counted);

/// Is the score's size above h (> 0)? Special functions only where |t| itself exceeds h, which is rare: a t
/// tail is never lighter than the normal one, so the score is never larger than |t|.
[[nodiscard]] bool level_score_exceeds(double t, std::int64_t counted, double h);

/// Does some split still exceed h when the readings' serial correlation, estimated about the two means of
/// `best`, is allowed for? B_k = (difference of means)^2 / (f_k/k + f_(n-k)/(n-k)), f_m the variance of a
/// mean of m readings with lag-1 correlation r, times m.
[[nodiscard]] bool holds_with_serial_correlation(const Stretch& stretch, const LevelSplit& best, double h);

/// Half width, in s_n, of what the reading after n >= 1 readings may be: T(df; Phi(h)) sqrt(1 + 1/n), s on
/// `degrees` >= 1 degrees of freedom. Relative accuracy 1e-9.
[[nodiscard]] double prediction_factor(std::int64_t n, std::int64_t degrees, double h);
/// s of those n readings alone, n >= 2.
[[nodiscard]] inline double prediction_factor(std::int64_t n, double h) {
  return prediction_factor(n, n - 1, h);
}

}  // namespace agreed
