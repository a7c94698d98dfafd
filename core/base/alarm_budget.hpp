#pragma once
// The alarm budget: one yearly number of false alerts, shared among charts and comparisons, and the
// in-control run lengths that follow from the shares and the cadences. Pure arithmetic of the configuration;
// a year has 365 days. Own policy, no published source.
#include <optional>
#include <vector>

#include "core/base/instant.hpp"
#include "core/base/settings.hpp"

namespace agreed {

/// Readings (pairs) a year, one `every` > 0; else std::invalid_argument.
[[nodiscard]] double readings_per_year(Duration every);

/// What a test of a comparison may use up, as a part of the comparison's share; of a chart's share, each of
/// its two scores.
inline constexpr double warning_part = 0.5, outlier_part = 0.25, scatter_part = 0.25, score_part = 0.5;

/// A chart or a comparison as the budget sees it.
struct BudgetEntry {
  Duration every{};                  ///< mean time between its readings (pairs), > 0
  std::optional<double> run_length;  ///< its own `in_control_run_length`, > 0, instead of a share
  /// Of a classical chart: the run length its limits give it, whatever its share; > 0.
  std::optional<double> run_length_of_limits{};
  /// Of a comparison: whether these tests are made at all. One that is not made keeps its part of the share
  /// and adds nothing to what is expected.
  bool tests_outliers = true, tests_scatter = true;
};

/// Readings between false signals of each score of a chart.
struct ChartRunLengths {
  double level = 0, precision = 0;
};

/// Pairs between false signals of each test of a comparison.
struct ComparisonRunLengths {
  double warning = 0, outlier = 0, scatter = 0;
};

struct BudgetShares {
  AlarmBudget budget;  ///< expected_per_year and by_kind count own run lengths as well as shares
  std::vector<ChartRunLengths> charts;            ///< in the order given
  std::vector<ComparisonRunLengths> comparisons;  ///< in the order given
  double taken_per_year = 0;                      ///< used up by own run lengths
  double share_per_year = 0;  ///< of each chart and comparison without its own; 0 when there is none
  /// Own run lengths use up more than is allowed, or all of it while others need a share. Those others then
  /// have run lengths of 0 and the configuration is wrong.
  bool overspent = false;
};

/// Own run lengths are taken off first; what is left is shared evenly. A chart's share: half to level, half
/// to precision; an own run length holds for each of the two. A comparison's: half to the pair chart's
/// warning, a quarter each to outliers and scatter; an own run length is the warning's, the other two get
/// twice that each. A classical chart has its share like any other, but what is expected of it follows from
/// its limits: it may use up more or less. Throws std::invalid_argument for an `every`, a run length or an
/// allowance that is not positive and finite.
[[nodiscard]] BudgetShares share_alarm_budget(double false_alerts_per_year,
                                              const std::vector<BudgetEntry>& charts,
                                              const std::vector<BudgetEntry>& comparisons);

}  // namespace agreed
