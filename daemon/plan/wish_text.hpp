#pragma once
// Whether the wishes are met, and what to change, for people.
#include "core/base/settings.hpp"
#include "daemon/plan/plan.hpp"
#include "daemon/plan/plan_words.hpp"

namespace agreed::plan {

void show_budget_wish(Paper& paper, const BudgetAnswer& answer, const Settings& settings);
/// `wish`: the budget answer, where one was asked for as well.
void show_notice_wish(Paper& paper, const NoticeAnswer& answer, const BudgetAnswer* wish,
                      const Settings& settings);

}  // namespace agreed::plan
