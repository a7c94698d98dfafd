#pragma once
// A plan for programs: every simulated figure with its standard error beside it (NAME_error).
#include <string>

#include "config/config.hpp"
#include "daemon/plan/plan.hpp"

namespace agreed::plan {

[[nodiscard]] std::string plan_json(const Plan& plan, const Config& config);

}  // namespace agreed::plan
