#pragma once
// GET /api/comparisons and GET /api/comparisons/{id}.
#include <string>

#include "daemon/engine/snapshot.hpp"

namespace agreed {

/// One comparison with its newest `pairs` pairs, oldest first. `index` is a position in the settings'
/// comparisons.
[[nodiscard]] std::string comparison_json(const Snapshot& snapshot, ComparisonIndex index, int pairs);

/// {"comparisons":[...]}: every configured comparison, in the settings' order.
[[nodiscard]] std::string comparisons_json(const Snapshot& snapshot, int pairs);

}  // namespace agreed
