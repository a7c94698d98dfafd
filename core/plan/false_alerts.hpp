#pragma once
// How often the service calls out falsely, chart by chart, comparison by comparison, from the run lengths of
// the configuration (3-statistics 3.0, 3.2). Computed, not simulated here; the errors are those of the tables
// and simulations behind the limits.
//
// Change-point charts and pair charts: a limit's run length is known to 1 % (at least 10,000 signals an
// entry, tests/data/run_lengths.csv). Classical charts: the standard error of their expected run length.
// Outliers and scatter rest on exact tails: no error. Errors of one table are the same for all charts, so
// they are added up as they are within a score and as squares between scores: level, precision, pairs.
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "core/base/settings.hpp"
#include "core/plan/waits.hpp"

namespace agreed::plan {

struct ScoreFalseAlerts {
  double run_length = 0;  ///< readings (pairs) between false alerts
  Simulated per_year;
  bool extrapolated = false;  ///< the limit lies beyond the simulated table, so its error is not known
};

struct ChartFalseAlerts {
  ChartIndex chart;
  bool own = false;        ///< from its own in_control_run_length
  bool classical = false;  ///< then `limits` alone, else level and precision
  std::optional<ScoreFalseAlerts> level, precision;
  std::optional<ScoreFalseAlerts> limits;  ///< all that was chosen for a classical chart, together
  Simulated per_year;
};

struct ComparisonFalseAlerts {
  ComparisonIndex comparison;
  bool own = false;
  ScoreFalseAlerts warning;
  ScoreFalseAlerts critical;                         ///< a part of those warnings, not counted again
  std::optional<ScoreFalseAlerts> outlier, scatter;  ///< none: not tested
  Simulated per_year;
};

struct FalseAlerts {
  std::vector<ChartFalseAlerts> charts;            ///< as Settings::charts
  std::vector<ComparisonFalseAlerts> comparisons;  ///< as Settings::comparisons
  std::map<std::string, Simulated> by_kind;        ///< alert kind -> a year
  Simulated per_year;
};

/// Needs settings of which no error was told (every run length positive).
[[nodiscard]] FalseAlerts false_alerts(const Settings& settings);

}  // namespace agreed::plan
