#pragma once
// A plan for people.
#include <string>

#include "config/config.hpp"
#include "daemon/plan/plan.hpp"

namespace agreed::plan {

/// Lines of at most 80 columns, ids and paths longer than that aside.
[[nodiscard]] std::string plan_text(const Plan& plan, const Config& config);

}  // namespace agreed::plan
