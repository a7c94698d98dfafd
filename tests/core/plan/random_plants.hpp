#pragma once
// Random configurations for properties of the alarm budget: cadences, own run lengths, classical charts,
// tests that are not made.
#include "core/base/random_normal.hpp"
#include "tests/core/plan/support.hpp"

namespace agreed::test {

inline bool chance(RandomNormal& draw, double p) {
  return draw.uniform() < p;
}

inline Duration random_cadence(RandomNormal& draw) {
  return hours(1 + static_cast<int>(draw.uniform() * 48));
}

inline ChartSettings random_chart(RandomNormal& draw) {
  ChartSettings chart = harrow_mill().charts[0];
  chart.every = random_cadence(draw);
  if (chance(draw, 0.2)) {
    chart.method = ChartMethod::classical;
    chart.expected.readings = 100 + 900 * draw.uniform();
    chart.expected.standard_error = 0.02 * chart.expected.readings;
  } else if (chance(draw, 0.25)) {
    chart.own_run_length = 2000 + 20'000 * draw.uniform();
  }
  return chart;
}

inline ComparisonSettings random_comparison(RandomNormal& draw) {
  ComparisonSettings comparison = harrow_mill().comparisons[0];
  comparison.every = random_cadence(draw);
  comparison.set_outliers_aside = chance(draw, 0.7);
  if (chance(draw, 0.3)) comparison.error_ratio.source = ErrorSource::given_lambda;
  if (chance(draw, 0.2)) comparison.relation = EstablishedLine{};
  if (chance(draw, 0.25)) comparison.own_run_length = 2000 + 20'000 * draw.uniform();
  return comparison;
}

/// An allowance that leaves shares.
inline Settings random_plant(RandomNormal& draw) {
  Settings settings = harrow_mill();
  settings.charts.clear();
  settings.comparisons.clear();
  const int charts = static_cast<int>(draw.uniform() * 8), comparisons = static_cast<int>(draw.uniform() * 4);
  for (int i = 0; i < charts; ++i) settings.charts.push_back(random_chart(draw));
  for (int i = 0; i < comparisons; ++i) settings.comparisons.push_back(random_comparison(draw));
  if (charts + comparisons == 0) settings.charts.push_back(random_chart(draw));
  const double taken =
      share_alarm_budget(1, chart_entries(settings), comparison_entries(settings)).taken_per_year;
  return shared(settings, taken + 1 + 10 * draw.uniform());
}

}  // namespace agreed::test
