#include "daemon/render/chart_range.hpp"

#include <algorithm>

namespace agreed {
namespace {

std::optional<double> level_of(const Snapshot& snapshot, std::uint32_t chart) {
  if (chart < snapshot.charts.size() && snapshot.charts[chart] && snapshot.charts[chart]->baseline.center)
    return snapshot.charts[chart]->baseline.center;
  const std::vector<Lot>& lots = snapshot.settings->charts[chart].lots;
  if (lots.empty() || !lots.front().reference) return {};
  return lots.front().reference->value;
}

}  // namespace

std::optional<StandardRange> range_not_covered(const Snapshot& snapshot, ChartIndex index) {
  const Settings& settings = *snapshot.settings;
  const ChartSettings& asked = settings.of(index);
  std::vector<double> means;
  for (std::uint32_t i = 0; i < settings.charts.size(); ++i) {
    const ChartSettings& chart = settings.charts[i];
    if (chart.analyzer != asked.analyzer || chart.measurand != asked.measurand) continue;
    const auto level = level_of(snapshot, i);
    if (!level) return {};
    means.push_back(*level);
  }
  const auto [lowest, highest] = std::minmax_element(means.begin(), means.end());
  StandardRange range{*lowest, *highest, {}};
  for (const double level : settings.of(asked.measurand).decision_levels)
    if (level < range.lowest || level > range.highest) range.uncovered.push_back(level);
  if (range.uncovered.empty()) return {};
  return range;
}

}  // namespace agreed
