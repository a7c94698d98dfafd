#include "daemon/plan/seen.hpp"

#include <algorithm>
#include <cmath>

#include "core/monitor/monitor.hpp"
#include "core/replay/event_log.hpp"
#include "daemon/engine/journal_events.hpp"
#include "daemon/journal/backup.hpp"

namespace agreed {
namespace {

SeenChart seen_of(const ChartView& view) {
  SeenChart seen;
  seen.readings = view.baseline.readings;
  seen.mean = view.baseline.center;
  seen.degrees_of_freedom = view.baseline.sd_degrees_of_freedom;
  if (view.baseline.sd && *view.baseline.sd > 0) seen.sd = view.baseline.sd;
  seen.warnings = view.warnings;
  return seen;
}

/// Mean and sd of what was measured, less what the error of x adds to it.
void add_true_values(const ComparisonView& view, SeenComparison& seen) {
  constexpr int kLeastPairs = 3;
  double n = 0, mean = 0, squares = 0, error = 0;
  for (const PairView& pair : view.pairs) {
    if (!pair.in_window) continue;
    n += 1;
    const double step = pair.x - mean;
    mean += step / n;
    squares += step * (pair.x - mean);
    error += seen.sd_x.value_or(0) * seen.sd_x.value_or(0) / pair.x_replicates;
  }
  if (n < kLeastPairs) return;
  seen.true_mean = mean;
  seen.true_sd = std::sqrt(std::max(0.0, squares / (n - 1) - error / n));
}

SeenComparison seen_of(const ComparisonView& view) {
  SeenComparison seen;
  seen.pairs = view.window.pairs;
  seen.sd_x = view.error.sd_x;
  seen.sd_y = view.error.sd_y;
  seen.lambda = view.error.lambda;
  if (view.fit) seen.slope = view.fit->slope;
  if (view.scatter && view.scatter->observed_sd > 0) seen.scatter = view.scatter->observed_sd;
  add_true_values(view, seen);
  for (const LevelView& level : view.levels)
    if (level.bias && level.low && level.high)
      seen.biases.push_back({level.level, *level.bias, *level.low, *level.high});
  seen.warnings = view.warnings;
  return seen;
}

Seen fold(const Config& config) {
  JournalReader journal(config.state);
  std::vector<Event> events;
  journal.at_one_moment([&] { events = journal_events(journal, *config.settings); });
  EventLog log(config.settings, std::move(events));
  log.know(log.events().size());
  Monitor monitor(config.settings);
  monitor.fold_all(log);
  Seen seen;
  seen.journal = true;
  for (std::uint32_t i = 0; i < config.settings->charts.size(); ++i)
    seen.charts.push_back(seen_of(monitor.chart(ChartIndex{i}).view()));
  for (std::uint32_t i = 0; i < config.settings->comparisons.size(); ++i)
    seen.comparisons.push_back(seen_of(monitor.comparison(ComparisonIndex{i}).view()));
  return seen;
}

}  // namespace

Seen seen_in_journal(const Config& config) {
  if (std::filesystem::exists(database_of(config.state))) return fold(config);
  Seen nothing;
  nothing.charts.resize(config.settings->charts.size());
  nothing.comparisons.resize(config.settings->comparisons.size());
  return nothing;
}

}  // namespace agreed
