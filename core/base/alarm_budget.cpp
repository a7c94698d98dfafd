#include "core/base/alarm_budget.hpp"

#include <cmath>
#include <stdexcept>
#include <string>

#include "core/base/finding.hpp"

namespace agreed {
namespace {

constexpr Duration kYear = std::chrono::hours(24 * 365);

void require_positive(double value, const char* what) {
  if (!(std::isfinite(value) && value > 0))
    throw std::invalid_argument(std::string("share_alarm_budget: ") + what + " must be positive and finite");
}

/// False alerts a year of everything that has a run length of its own. `part` is that of the test whose run
/// length is given: what a whole entry uses up is its rate over its part.
double taken(const std::vector<BudgetEntry>& entries, double part) {
  double sum = 0;
  for (const auto& entry : entries) {
    const double per_year = readings_per_year(entry.every);
    if (!entry.run_length) continue;
    require_positive(*entry.run_length, "a run length");
    sum += per_year / *entry.run_length / part;
  }
  return sum;
}

std::size_t without_own(const std::vector<BudgetEntry>& entries) {
  std::size_t count = 0;
  for (const auto& entry : entries) count += entry.run_length ? 0 : 1;
  return count;
}

/// The run length of the test that gets `part` of the share.
double from_share(const BudgetEntry& entry, double share, double part) {
  return share > 0 ? readings_per_year(entry.every) / (share * part) : 0.0;
}

ChartRunLengths chart_run_lengths(const BudgetEntry& chart, double share) {
  const double each = chart.run_length.value_or(from_share(chart, share, score_part));
  return {each, each};
}

ComparisonRunLengths comparison_run_lengths(const BudgetEntry& comparison, double share) {
  if (comparison.run_length)
    return {*comparison.run_length, 2 * *comparison.run_length, 2 * *comparison.run_length};
  return {from_share(comparison, share, warning_part), from_share(comparison, share, outlier_part),
          from_share(comparison, share, scatter_part)};
}

void expect(AlarmBudget& budget, AlertKind kind, const BudgetEntry& entry, double run_length) {
  if (!(run_length > 0)) return;
  const double per_year = readings_per_year(entry.every) / run_length;
  budget.by_kind[to_string(kind)] += per_year;
  budget.expected_per_year += per_year;
}

void add_expectations(BudgetShares& shares, const std::vector<BudgetEntry>& charts,
                      const std::vector<BudgetEntry>& comparisons) {
  for (std::size_t i = 0; i < charts.size(); ++i) {
    if (const auto of_limits = charts[i].run_length_of_limits) {
      require_positive(*of_limits, "a run length");
      expect(shares.budget, AlertKind::check_standard_unstable, charts[i], *of_limits);
      continue;
    }
    expect(shares.budget, AlertKind::check_standard_unstable, charts[i], shares.charts[i].level);
    expect(shares.budget, AlertKind::check_standard_unstable, charts[i], shares.charts[i].precision);
  }
  for (std::size_t i = 0; i < comparisons.size(); ++i) {
    expect(shares.budget, AlertKind::agreement_drifting, comparisons[i], shares.comparisons[i].warning);
    if (comparisons[i].tests_outliers)
      expect(shares.budget, AlertKind::pair_outlier, comparisons[i], shares.comparisons[i].outlier);
    if (comparisons[i].tests_scatter)
      expect(shares.budget, AlertKind::sample_scatter, comparisons[i], shares.comparisons[i].scatter);
  }
}

}  // namespace

double readings_per_year(Duration every) {
  require_positive(static_cast<double>(every.count()), "every");
  return static_cast<double>(kYear.count()) / static_cast<double>(every.count());
}

BudgetShares share_alarm_budget(double false_alerts_per_year, const std::vector<BudgetEntry>& charts,
                                const std::vector<BudgetEntry>& comparisons) {
  require_positive(false_alerts_per_year, "the allowance");
  BudgetShares shares;
  shares.budget.allowed_per_year = false_alerts_per_year;
  shares.taken_per_year = taken(charts, score_part) + taken(comparisons, warning_part);
  const double left = false_alerts_per_year - shares.taken_per_year;
  const std::size_t sharing = without_own(charts) + without_own(comparisons);
  // Own run lengths worked out from the very allowance must not fail for a last digit.
  const double rounding = 1e-9 * false_alerts_per_year;
  shares.overspent = sharing > 0 ? left <= rounding : left < -rounding;
  if (sharing > 0 && !shares.overspent) shares.share_per_year = left / static_cast<double>(sharing);
  for (const auto& chart : charts) shares.charts.push_back(chart_run_lengths(chart, shares.share_per_year));
  for (const auto& comparison : comparisons)
    shares.comparisons.push_back(comparison_run_lengths(comparison, shares.share_per_year));
  add_expectations(shares, charts, comparisons);
  return shares;
}

}  // namespace agreed
