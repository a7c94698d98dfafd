#pragma once
// Limits from run lengths: the mean number of readings between false signals, as simulated
// (3-statistics 3.2).

#include <cstdint>

namespace agreed {

enum class Score { level, precision, pairs, pairs_established_line };

struct ChangeLimit {
  double h = 0;               ///< limit of the score, in normal standard deviations
  bool extrapolated = false;  ///< beyond the simulated table
};

/// The limit whose in-control run length is `run_length` (readings, > 1; else std::domain_error), by
/// interpolating ln(run length) in h; beyond the table by the fitted formula.
[[nodiscard]] ChangeLimit limit_for(Score score, double run_length);

/// The limit of the level score at the n-th reading of a stretch, 5 or more, that later has the limit h. The
/// first readings have fewer splits, each reading of them is nearly a new question, and a constant limit
/// would call too rarely at the 5th to 9th reading and too often at the 10th to 30th; this one keeps the
/// promised chance at each of them (Hawkins, Qiu and Kang 2003 calibrate theirs so). From the 30th on it is
/// h.
[[nodiscard]] double level_limit_at(std::int64_t n, double h);

/// The inverse of limit_for.
[[nodiscard]] double run_length_for(Score score, double h);

}  // namespace agreed
