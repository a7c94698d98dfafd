#pragma once
// Charts and comparisons as the alarm budget sees them, from settings alone.
#include <vector>

#include "core/base/alarm_budget.hpp"

namespace agreed {

/// Cadence, own run length, and the run length that a classical chart's limits give it (where `expected` is
/// worked out).
[[nodiscard]] BudgetEntry chart_entry(const ChartSettings& chart);
/// Scatter is not tested where nothing is known of the size of the errors.
[[nodiscard]] BudgetEntry comparison_entry(const ComparisonSettings& comparison);

/// As settings.charts.
[[nodiscard]] std::vector<BudgetEntry> chart_entries(const Settings& settings);
/// As settings.comparisons.
[[nodiscard]] std::vector<BudgetEntry> comparison_entries(const Settings& settings);

/// Puts run lengths and what is expected into the settings.
void apply_budget(const BudgetShares& shares, Settings& settings);

}  // namespace agreed
