#include "core/plan/false_alerts.hpp"

#include <cmath>

#include "core/base/budget_entries.hpp"
#include "core/base/finding.hpp"
#include "core/chart/run_length.hpp"
#include "core/pair/drift_alarm.hpp"

namespace agreed::plan {
namespace {
// Of a table of run lengths: 10,000 signals an entry or more.
constexpr double kTableError = 0.01;

ScoreFalseAlerts of_score(Score score, double run_length, Duration every) {
  const double per_year = readings_per_year(every) / run_length;
  return {run_length, {per_year, kTableError * per_year}, limit_for(score, run_length).extrapolated};
}

ScoreFalseAlerts of_exact_test(double run_length, Duration every) {
  return {run_length, {readings_per_year(every) / run_length, 0}, false};
}

ScoreFalseAlerts of_limits(const ExpectedRunLength& expected, Duration every) {
  const double per_year = readings_per_year(every) / expected.readings;
  return {expected.readings, {per_year, per_year * expected.standard_error / expected.readings}, false};
}

/// Errors of one source add up; those of different sources as squares.
struct Sum {
  double value = 0, level = 0, precision = 0, pairs = 0, classical = 0;

  void add(const ScoreFalseAlerts& score, double Sum::*source) {
    value += score.per_year.value;
    this->*source += score.per_year.standard_error;
  }
  void add(const Sum& other) {
    value += other.value;
    for (double Sum::*source : {&Sum::level, &Sum::precision, &Sum::pairs, &Sum::classical})
      this->*source += other.*source;
  }
  [[nodiscard]] Simulated total() const {
    return {value, std::hypot(std::hypot(level, precision), std::hypot(pairs, classical))};
  }
};

ChartFalseAlerts of_chart(const Settings& settings, ChartIndex index, Sum& unstable) {
  const ChartSettings& chart = settings.of(index);
  ChartFalseAlerts result;
  result.chart = index;
  result.own = chart.own_run_length.has_value();
  result.classical = chart.method == ChartMethod::classical;
  Sum sum;
  if (result.classical) {
    result.limits = of_limits(chart.expected, chart.every);
    sum.add(*result.limits, &Sum::classical);
  } else {
    result.level = of_score(Score::level, chart.level_run_length, chart.every);
    result.precision = of_score(Score::precision, chart.precision_run_length, chart.every);
    sum.add(*result.level, &Sum::level);
    sum.add(*result.precision, &Sum::precision);
  }
  result.per_year = sum.total();
  unstable.add(sum);
  return result;
}

using ByKind = std::map<AlertKind, Sum>;

ComparisonFalseAlerts of_comparison(const Settings& settings, ComparisonIndex index, ByKind& by_kind) {
  const ComparisonSettings& comparison = settings.of(index);
  const BudgetEntry entry = comparison_entry(comparison);
  ComparisonFalseAlerts result;
  result.comparison = index;
  result.own = comparison.own_run_length.has_value();
  const Score score = score_of(comparison);
  result.warning = of_score(score, comparison.warning_run_length, comparison.every);
  result.critical = of_score(score, critical_factor * comparison.warning_run_length, comparison.every);
  Sum sum;
  const auto add = [&](const ScoreFalseAlerts& test, AlertKind kind) {
    sum.add(test, &Sum::pairs);
    by_kind[kind].add(test, &Sum::pairs);
  };
  add(result.warning, AlertKind::agreement_drifting);
  if (entry.tests_outliers) {
    result.outlier = of_exact_test(comparison.outlier_run_length, comparison.every);
    add(*result.outlier, AlertKind::pair_outlier);
  }
  if (entry.tests_scatter) {
    result.scatter = of_exact_test(comparison.scatter_run_length, comparison.every);
    add(*result.scatter, AlertKind::sample_scatter);
  }
  result.per_year = sum.total();
  return result;
}
}  // namespace

FalseAlerts false_alerts(const Settings& settings) {
  FalseAlerts all;
  ByKind by_kind;
  for (std::uint32_t i = 0; i < settings.charts.size(); ++i)
    all.charts.push_back(of_chart(settings, {i}, by_kind[AlertKind::check_standard_unstable]));
  for (std::uint32_t i = 0; i < settings.comparisons.size(); ++i)
    all.comparisons.push_back(of_comparison(settings, {i}, by_kind));
  Sum sum;
  for (const auto& [kind, of_kind] : by_kind) {
    all.by_kind[to_string(kind)] = of_kind.total();
    sum.add(of_kind);
  }
  all.per_year = sum.total();
  return all;
}

}  // namespace agreed::plan
