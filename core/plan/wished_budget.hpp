#pragma once
// Which `false_alerts_per_year` makes the whole service call out falsely as often as wished. The allowance
// and what is expected differ: classical charts take what their limits make them, own run lengths stay, and
// tests that are not made give their part back to nobody. Exact arithmetic, the inverse of
// share_alarm_budget.
#include <optional>
#include <vector>

#include "core/base/settings.hpp"

namespace agreed::plan {

/// One that has a run length which the allowance does not move.
struct FixedRate {
  std::optional<ChartIndex> chart;            ///< either the one
  std::optional<ComparisonIndex> comparison;  ///< or the other
  bool classical = false;                     ///< by the limits chosen; else by an own in_control_run_length
  double per_year = 0;                        ///< false alerts expected of it
  /// The in_control_run_length that would leave it an even share of the wish; 0 for a classical chart.
  double even_run_length = 0;
};

struct WishedBudget {
  double wished = 0;
  double fixed_per_year = 0;     ///< expected of all that no allowance moves
  std::vector<FixedRate> fixed;  ///< most false alerts first
  bool any_share = false;        ///< whether anything lives on the allowance at all
  /// The setting that brings the expected number to the wish. Nothing: those fixed alone reach it, or nothing
  /// lives on the allowance.
  std::optional<double> false_alerts_per_year;
  /// The same if no chart and comparison had an own in_control_run_length; nothing where classical charts
  /// alone reach the wish or none has one.
  std::optional<double> without_own_run_lengths;
};

/// `wished` false alerts a year > 0, all together; else std::invalid_argument.
[[nodiscard]] WishedBudget budget_for(const Settings& settings, double wished);

/// The settings as they would be with another allowance; nothing if it would be overspent.
[[nodiscard]] std::optional<Settings> with_allowance(const Settings& settings, double false_alerts_per_year);

}  // namespace agreed::plan
