// Pairs and check standards brought together: who moved, and what is in doubt.
#include <algorithm>
#include <cmath>

#include "core/monitor/monitor.hpp"

namespace agreed {

CheckShift Monitor::shift_of(std::span<const ChartIndex> charts, const Moment& moment,
                             double resolution) const {
  std::vector<CheckShift> shifts;
  for (const ChartIndex chart : charts)
    shifts.push_back(check_shift(charts_[chart.value].fold.readings(), moment, resolution));
  return pooled(shifts);
}

std::optional<ExplainedChange> Monitor::explain(ComparisonIndex comparison) const {
  const ComparisonStream& stream = comparisons_.at(comparison.value);
  const auto change = stream.fold.change();
  if (!change) return std::nullopt;
  CheckShift x, y;
  if (change->split) {
    const Moment moment{change->split->since, change->split->started_at};
    const std::optional<int> decimals = settings_->of(settings_->of(comparison).measurand).decimals;
    const double resolution = decimals ? std::pow(10.0, -*decimals) : 0.0;
    x = shift_of(stream.x_charts, moment, resolution);
    y = shift_of(stream.y_charts, moment, resolution);
  }
  return ExplainedChange{diagnose(*change, x, y, *settings_, comparison), change->look_back};
}

std::vector<ComparisonIndex> Monitor::explained_anew(const MonitorOutcome& outcome) const {
  const auto changed = [&](const std::vector<ChartIndex>& charts) {
    return std::any_of(charts.begin(), charts.end(),
                       [&](ChartIndex chart) { return outcome.charts_changed.contains(chart); });
  };
  std::vector<ComparisonIndex> found;
  for (std::uint32_t i = 0; i < comparisons_.size(); ++i) {
    const ComparisonStream& stream = comparisons_[i];
    if (!outcome.comparisons_changed.contains({i}) && !changed(stream.x_charts) && !changed(stream.y_charts))
      continue;
    if (stream.fold.changed()) found.push_back({i});
  }
  return found;
}

}  // namespace agreed
