#pragma once
// A plant for the tests of plans: Harrow Mill with one chart and one comparison, and random ones.
#include <chrono>
#include <string>

#include "core/base/budget_entries.hpp"
#include "core/plan/pair_conditions.hpp"
#include "core/plan/trial.hpp"

namespace agreed::test {

using std::chrono::hours;

/// One check standard of protein on line1, every 8 h; line1 against line2, every 2 h. Six false alerts a
/// year.
inline Settings harrow_mill() {
  Settings settings;
  settings.site = "Harrow Mill";
  settings.analyzers = {{"line1", ""}, {"line2", ""}};
  Measurand protein;
  protein.id = protein.title = "protein";
  protein.unit = "g/100 g";
  protein.decision_levels = {10.5, 13.0};
  protein.allowable = AllowableDifference{0.1, std::nullopt};
  settings.measurands = {protein};
  settings.standards = {{"wheat-low", ""}};
  ChartSettings chart;
  chart.every = hours(8);
  chart.lots = {Lot{}};
  settings.charts = {chart};
  ComparisonSettings comparison;
  comparison.id = comparison.title = "protein";
  comparison.y = {1};
  comparison.every = hours(2);
  comparison.error_ratio.source = ErrorSource::given_sds;
  comparison.error_ratio.sd_x = comparison.error_ratio.sd_y = 0.1;
  settings.comparisons = {comparison};
  return settings;
}

inline Settings shared(Settings settings, double false_alerts_per_year) {
  apply_budget(
      share_alarm_budget(false_alerts_per_year, chart_entries(settings), comparison_entries(settings)),
      settings);
  return settings;
}

/// Errors of these sds, lambda exactly known; samples evenly from 9 to 15.
inline plan::PairConditions conditions(double sd_x = 0.1, double sd_y = 0.1) {
  ErrorRatio ratio;
  ratio.known = ratio.variances_known = true;
  ratio.x.variance = sd_x * sd_x;
  ratio.y.variance = sd_y * sd_y;
  ratio.lambda = ratio.low = ratio.high = ratio.x.variance / ratio.y.variance;
  return {plan::SampleValues::evenly(9, 15), sd_x, sd_y, ratio};
}

/// All that is left of it.
template <class Stepwise>
void finish(Stepwise& run) {
  while (run.step()) {
  }
}

inline plan::Waits waits_of(const plan::Trial& trial, int count, int horizon, std::uint64_t seed = 1) {
  plan::TrialRun run(trial, {count, horizon, seed});
  finish(run);
  return run.waits();
}

}  // namespace agreed::test
