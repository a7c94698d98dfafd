#include "daemon/cli/plan.hpp"

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "daemon/cli/print_json.hpp"
#include "daemon/cli/progress.hpp"
#include "daemon/cli/with_configuration.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/plan/plan.hpp"
#include "daemon/plan/plan_json.hpp"
#include "daemon/plan/plan_text.hpp"

namespace agreed {
namespace {

int say_nothing_to_plan(bool json) {
  const std::string why = "There is nothing to plan: neither check_standards nor comparisons are configured.";
  if (json)
    print_json({{"error", why}});
  else
    fmt::print("{}\n", why);
  return kAnswerIsNo;
}

plan::Plan planned(const PlanCommand& command, const Config& config) {
  const plan::Wishes wishes = plan::read_wishes(command, *config.settings);
  Progress progress("simulating");
  return plan::make_plan(*config.settings, plan::seen_in_journal(config), wishes, command.trials,
                         [&progress](double share) { progress.show(share); });
}

}  // namespace

int plan_command(const PlanCommand& command) {
  return with_configuration(command.config, command.json, [&](const Config& config) {
    if (config.settings->charts.empty() && config.settings->comparisons.empty())
      return static_cast<int>(say_nothing_to_plan(command.json));
    const plan::Plan plan = planned(command, config);
    fmt::print("{}", command.json ? plan::plan_json(plan, config) : plan::plan_text(plan, config));
    return static_cast<int>(plan.all_met() ? kDone : kAnswerIsNo);
  });
}

}  // namespace agreed
