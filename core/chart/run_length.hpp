#pragma once
// Limits from run lengths: the mean number of readings between false signals, as simulated
// (3-statistics 3.2).

namespace agreed {

enum class Score { level, precision, pairs, pairs_established_line };

struct ChangeLimit {
  double h = 0;               ///< limit of the score, in normal standard deviations
  bool extrapolated = false;  ///< beyond the simulated table
};

/// The limit whose in-control run length is `run_length` (readings, > 1; else std::domain_error), by
/// interpolating ln(run length) in h; beyond the table by the fitted formula.
[[nodiscard]] ChangeLimit limit_for(Score score, double run_length);

/// The inverse.
[[nodiscard]] double run_length_for(Score score, double h);

}  // namespace agreed
