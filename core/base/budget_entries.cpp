#include "core/base/budget_entries.hpp"

namespace agreed {

BudgetEntry chart_entry(const ChartSettings& chart) {
  BudgetEntry entry{chart.every, chart.own_run_length};
  if (chart.expected.readings > 0) entry.run_length_of_limits = chart.expected.readings;
  return entry;
}

BudgetEntry comparison_entry(const ComparisonSettings& comparison) {
  BudgetEntry entry{comparison.every, comparison.own_run_length};
  entry.tests_outliers = comparison.set_outliers_aside;
  // A bare lambda says nothing of the size of the errors, so scatter cannot be held against it.
  entry.tests_scatter = comparison.error_ratio.source != ErrorSource::given_lambda;
  return entry;
}

std::vector<BudgetEntry> chart_entries(const Settings& settings) {
  std::vector<BudgetEntry> entries;
  for (const ChartSettings& chart : settings.charts) entries.push_back(chart_entry(chart));
  return entries;
}

std::vector<BudgetEntry> comparison_entries(const Settings& settings) {
  std::vector<BudgetEntry> entries;
  for (const ComparisonSettings& comparison : settings.comparisons)
    entries.push_back(comparison_entry(comparison));
  return entries;
}

void apply_budget(const BudgetShares& shares, Settings& settings) {
  settings.alarm_budget = shares.budget;
  for (std::size_t i = 0; i < settings.charts.size(); ++i) {
    settings.charts[i].level_run_length = shares.charts.at(i).level;
    settings.charts[i].precision_run_length = shares.charts.at(i).precision;
  }
  for (std::size_t i = 0; i < settings.comparisons.size(); ++i) {
    settings.comparisons[i].warning_run_length = shares.comparisons.at(i).warning;
    settings.comparisons[i].outlier_run_length = shares.comparisons.at(i).outlier;
    settings.comparisons[i].scatter_run_length = shares.comparisons.at(i).scatter;
  }
}

}  // namespace agreed
