#pragma once
// GET /api/charts and GET /api/charts/{analyzer}/{standard}/{measurand}.
#include <string>

#include "daemon/engine/snapshot.hpp"

namespace agreed {

/// One chart with its newest `points` points, oldest first. `index` is a position in the settings' charts.
[[nodiscard]] std::string chart_json(const Snapshot& snapshot, ChartIndex index, int points);

/// {"charts":[...]}: every configured chart, in the settings' order.
[[nodiscard]] std::string charts_json(const Snapshot& snapshot, int points);

}  // namespace agreed
