#pragma once
// The demo plant as Settings: line1 and line2, protein and moisture, wheat-low and wheat-high on both.
#include "core/base/settings.hpp"

namespace agreed::testing {

inline Settings harrow_mill() {
  Settings settings;
  settings.site = "Harrow Mill";
  settings.analyzers = {{"line1", "line1"}, {"line2", "line2"}};
  settings.measurands.resize(2);
  settings.measurands[0].id = "moisture";
  settings.measurands[1].id = "protein";
  settings.standards = {{"wheat-high", "wheat-high"}, {"wheat-low", "wheat-low"}};
  for (std::uint32_t analyzer = 0; analyzer < 2; ++analyzer)
    for (std::uint32_t standard = 0; standard < 2; ++standard)
      for (std::uint32_t measurand = 0; measurand < 2; ++measurand) {
        ChartSettings chart;
        chart.analyzer = {analyzer};
        chart.standard = {standard};
        chart.measurand = {measurand};
        settings.charts.push_back(chart);
      }
  ComparisonSettings comparison;
  comparison.id = "protein";
  comparison.measurand = {1};
  comparison.x = {0};
  comparison.y = {1};
  settings.comparisons.push_back(comparison);
  return settings;
}

}  // namespace agreed::testing
