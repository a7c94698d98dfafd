#pragma once
// Which charts notice a step alike when it is counted in their sd, and what to simulate for them.
#include <optional>
#include <vector>

#include "core/base/settings.hpp"
#include "core/plan/pair_conditions.hpp"

namespace agreed::plan {

/// A chart to simulate, and the sd of its readings there: its own, or 1 where only the size in sds matters.
struct LawModel {
  Settings settings;
  ChartIndex chart;
  double sd = 1;
  bool in_sds = true;  ///< the law holds for every chart with these settings
};

/// `sd`: none while it is not known.
[[nodiscard]] LawModel law_model(const Settings& settings, ChartIndex chart, std::optional<double> sd);

/// Whether two models with `in_sds` have the same limits.
[[nodiscard]] bool same_law(const LawModel& a, const LawModel& b);

/// A comparison of which no sd is known: as it is, with one pair's sd for the unit.
struct UnitPairs {
  Settings settings;
  PairConditions conditions;
};
[[nodiscard]] UnitPairs unit_pairs(const Settings& settings, ComparisonIndex comparison);

}  // namespace agreed::plan
