#include "daemon/plan/seen.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

#include "core/monitor/monitor.hpp"
#include "core/replay/event_log.hpp"
#include "daemon/engine/journal_events.hpp"
#include "daemon/journal/verify.hpp"

namespace agreed::plan {
namespace {

SeenChart seen_of(const Chart& chart) {
  const ChartView view = chart.view();
  SeenChart seen;
  seen.readings = view.baseline.readings;
  seen.mean = view.baseline.center;
  seen.degrees_of_freedom = view.baseline.sd_degrees_of_freedom;
  if (view.baseline.sd && *view.baseline.sd > 0) seen.sd = view.baseline.sd;
  seen.repeatability = chart.repeatability();
  seen.warnings = view.warnings;
  return seen;
}

std::vector<PairView> in_window(const ComparisonView& view) {
  std::vector<PairView> pairs;
  std::copy_if(view.pairs.begin(), view.pairs.end(), std::back_inserter(pairs),
               [](const PairView& pair) { return pair.in_window; });
  return pairs;
}

/// The results of x, drawn together about their mean until their variance is that of the true values.
std::vector<double> true_values(const std::vector<PairView>& pairs, double reliability) {
  double mean = 0;
  for (const PairView& pair : pairs) mean += pair.x / static_cast<double>(pairs.size());
  std::vector<double> values;
  values.reserve(pairs.size());
  for (const PairView& pair : pairs) values.push_back(mean + std::sqrt(reliability) * (pair.x - mean));
  return values;
}

int median_of(std::vector<int> numbers) {
  const auto middle = numbers.begin() + static_cast<std::ptrdiff_t>(numbers.size() / 2);
  std::nth_element(numbers.begin(), middle, numbers.end());
  return *middle;
}

/// sd of the pairs about the line, where the comparison does not state it.
std::optional<double> scatter_about(const FitView& fit, const std::vector<PairView>& pairs) {
  constexpr std::size_t kLeastPairs = 4;
  if (pairs.size() < kLeastPairs) return std::nullopt;
  double squares = 0;
  for (const PairView& pair : pairs) {
    const double residual = pair.y - fit.intercept - fit.slope * pair.x;
    squares += residual * residual;
  }
  if (!(squares > 0)) return std::nullopt;
  return std::sqrt(squares / static_cast<double>(pairs.size() - 2));
}

ErrorVariance variance_of(const std::optional<double>& sd, const std::optional<double>& df) {
  return sd && df ? ErrorVariance{*sd * *sd, *df} : ErrorVariance{};
}

SeenComparison seen_of(const ComparisonView& view) {
  SeenComparison seen;
  seen.pairs = view.window.pairs;
  seen.warnings = view.warnings;
  if (view.error.source == "replicates") {
    seen.x_replicate_errors = variance_of(view.error.sd_x, view.error.df_x);
    seen.y_replicate_errors = variance_of(view.error.sd_y, view.error.df_y);
  }
  const std::vector<PairView> pairs = in_window(view);
  if (pairs.empty() || !view.fit) return seen;
  seen.slope = view.fit->slope;
  seen.scatter = scatter_about(*view.fit, pairs);
  if (view.scatter && view.scatter->observed_sd > 0 && view.scatter->expected_sd > 0) {
    seen.scatter = view.scatter->observed_sd;
    seen.expected_scatter = view.scatter->expected_sd;
  }
  seen.true_values = true_values(pairs, view.range ? view.range->reliability_ratio : 1);
  std::vector<int> x_replicates, y_replicates;
  for (const PairView& pair : pairs) {
    x_replicates.push_back(pair.x_replicates);
    y_replicates.push_back(pair.y_replicates);
  }
  seen.x_replicates = median_of(std::move(x_replicates));
  seen.y_replicates = median_of(std::move(y_replicates));
  for (const LevelView& level : view.levels)
    if (level.bias && level.low && level.high)
      seen.biases.push_back({level.level, *level.bias, *level.low, *level.high});
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
    seen.charts.push_back(seen_of(monitor.chart(ChartIndex{i})));
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

}  // namespace agreed::plan
