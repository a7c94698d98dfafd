#include "core/plan/wished_budget.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "core/base/budget_entries.hpp"

namespace agreed::plan {
namespace {
/// What a comparison uses up per unit of its warning's rate, and per unit of its share.
double per_warning(const BudgetEntry& entry) {
  return 1 + (entry.tests_outliers ? outlier_part / warning_part : 0) +
         (entry.tests_scatter ? scatter_part / warning_part : 0);
}
double used_of_share(const BudgetEntry& entry) {
  return warning_part * per_warning(entry);
}

/// What is expected as a function of the allowance: fixed + (allowance - taken) / sharing * used.
struct Balance {
  std::vector<FixedRate> fixed;
  double fixed_per_year = 0;
  double used = 0;   ///< of one share each, by all that live on a share
  int sharing = 0;   ///< that have a share, used or not
  double taken = 0;  ///< of the allowance, by own run lengths

  void fix(const FixedRate& rate) {
    fixed.push_back(rate);
    fixed_per_year += rate.per_year;
  }
  [[nodiscard]] std::optional<double> allowance_for(double wished) const {
    if (!(used > 0 && wished > fixed_per_year)) return std::nullopt;
    return taken + (wished - fixed_per_year) * sharing / used;
  }
};

void weigh_chart(ChartIndex index, const ChartSettings& chart, double even, Balance& balance) {
  const double readings = readings_per_year(chart.every);
  if (chart.own_run_length) {
    const double per_year = readings / *chart.own_run_length / score_part;
    balance.taken += per_year;
    return balance.fix({index, {}, false, per_year, readings / (score_part * even)});
  }
  ++balance.sharing;
  if (chart.method != ChartMethod::classical) {
    balance.used += 1;
  } else if (chart.expected.readings > 0) {
    balance.fix({index, {}, true, readings / chart.expected.readings, 0});
  }
}

void weigh_comparison(ComparisonIndex index, const ComparisonSettings& comparison, double even,
                      Balance& balance) {
  const BudgetEntry entry = comparison_entry(comparison);
  const double pairs = readings_per_year(comparison.every);
  if (!comparison.own_run_length) {
    ++balance.sharing;
    balance.used += used_of_share(entry);
    return;
  }
  const double warnings = pairs / *comparison.own_run_length;
  balance.taken += warnings / warning_part;
  balance.fix({{}, index, false, warnings * per_warning(entry), pairs * per_warning(entry) / even});
}

Balance balance_of(const Settings& settings, double wished) {
  const double even = wished / static_cast<double>(settings.charts.size() + settings.comparisons.size());
  Balance balance;
  for (std::uint32_t i = 0; i < settings.charts.size(); ++i)
    weigh_chart({i}, settings.charts[i], even, balance);
  for (std::uint32_t i = 0; i < settings.comparisons.size(); ++i)
    weigh_comparison({i}, settings.comparisons[i], even, balance);
  return balance;
}

std::optional<double> allowance_without_own(Settings settings, double wished) {
  bool any = false;
  const auto forget = [&any](std::optional<double>& own) {
    any = any || own.has_value();
    own.reset();
  };
  for (ChartSettings& chart : settings.charts) forget(chart.own_run_length);
  for (ComparisonSettings& comparison : settings.comparisons) forget(comparison.own_run_length);
  return any ? balance_of(settings, wished).allowance_for(wished) : std::nullopt;
}
}  // namespace

WishedBudget budget_for(const Settings& settings, double wished) {
  if (!(std::isfinite(wished) && wished > 0))
    throw std::invalid_argument("wished: expected a positive number of false alerts a year");
  Balance balance = balance_of(settings, wished);
  WishedBudget result;
  result.wished = wished;
  result.fixed_per_year = balance.fixed_per_year;
  result.any_share = balance.used > 0;
  result.false_alerts_per_year = balance.allowance_for(wished);
  result.without_own_run_lengths = allowance_without_own(settings, wished);
  result.fixed = std::move(balance.fixed);
  std::stable_sort(result.fixed.begin(), result.fixed.end(),
                   [](const FixedRate& a, const FixedRate& b) { return a.per_year > b.per_year; });
  return result;
}

std::optional<Settings> with_allowance(const Settings& settings, double false_alerts_per_year) {
  const BudgetShares shares =
      share_alarm_budget(false_alerts_per_year, chart_entries(settings), comparison_entries(settings));
  if (shares.overspent) return std::nullopt;
  Settings changed = settings;
  apply_budget(shares, changed);
  return changed;
}

}  // namespace agreed::plan
