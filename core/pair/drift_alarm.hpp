#pragma once
// Purpose: when the pair chart's score opens, raises and ends `agreement_drifting`.
// Inputs: the chart after each accepted pair; delta at lambda and at both ends of its interval.
// Method: own. The score counts only if it holds at lambda low, lambda and lambda high: the smallest of the
//   three is the score. Above the warning limit it opens, above the critical limit it is critical and the
//   stretch restarts at the estimated start. A warning ends when 3 pairs have come and the score is below its
//   limit less 0.9; a critical one when agreement is shown again (without decision levels: never); both at an
//   intervention.
// Cost: one scan of the splits a pair, three while the score is near or above the limit.
#include <array>
#include <optional>

#include "core/base/settings.hpp"
#include "core/chart/run_length.hpp"
#include "core/pair/pair_chart.hpp"

namespace agreed {

/// The row of run lengths that the pair chart's limits follow. With an established line it holds after a
/// change too, when the chart asks without it: the run length is then about a seventh longer.
[[nodiscard]] inline Score score_of(const ComparisonSettings& comparison) {
  return comparison.relation ? Score::pairs_established_line : Score::pairs;
}

/// In-control run length of the pair chart's `critical` over that of its `warning`.
inline constexpr double critical_factor = 10;

/// Limits of the score, in normal standard deviations.
struct DriftLimits {
  double warning = 0, critical = 0;
};

/// delta at lambda, at lambda low and at lambda high.
using Deltas = std::array<double, 3>;

class DriftAlarm {
 public:
  explicit DriftAlarm(DriftLimits limits);

  enum class Step { nothing, warning, critical, not_confirmed };
  /// What the chart says after one more pair.
  Step step(const PairChart& chart, const Deltas& deltas);
  /// Agreement is shown, or an intervention: no alarm any more.
  void end() { open_.reset(); }

  [[nodiscard]] std::optional<Severity> open() const { return open_; }
  /// The start as estimated at the last opening or raising.
  [[nodiscard]] const Split& split() const { return split_; }
  [[nodiscard]] const DriftLimits& limits() const { return limits_; }

  /// The smallest evidence of the three, null while there is none.
  [[nodiscard]] static std::optional<double> evidence(const PairChart& chart, const Deltas& deltas);

 private:
  DriftLimits limits_;
  double warning_, critical_, still_confirmed_;  ///< as evidence
  std::optional<Severity> open_;
  int pairs_since_ = 0;
  Split split_;
};

}  // namespace agreed
