#pragma once
// The settings of the demo mill, as far as alerts look at them.
#include <memory>

#include "core/base/settings.hpp"

namespace agreed::test {

inline std::shared_ptr<const Settings> harrow_mill() {
  auto settings = std::make_shared<Settings>();
  settings->site = "Harrow Mill";
  settings->analyzers = {{"line1", "NIR analyzer, packing line 1"},
                         {"line2", "NIR analyzer, packing line 2"}};
  settings->measurands = {{"moisture", "Moisture", "g/100 g", 1, {14.5}, AllowableDifference{0.3, {}}},
                          {"protein", "Protein", "g/100 g", 2, {10.5, 13.0}, AllowableDifference{0.2, {}}}};
  settings->standards = {{"wheat-high", ""}, {"wheat-low", ""}};
  ComparisonSettings protein;
  protein.id = "protein";
  protein.measurand = {1};
  protein.x = {0};
  protein.y = {1};
  ComparisonSettings moisture = protein;
  moisture.id = "moisture";
  moisture.measurand = {0};
  settings->comparisons = {moisture, protein};
  return settings;
}

inline constexpr Instant at_hour(int hours) {
  // 2026-02-05 06:00 UTC and on.
  return Instant{std::chrono::seconds(1770271200)} + std::chrono::hours(hours);
}

}  // namespace agreed::test
