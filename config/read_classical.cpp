// Classical charts: what was chosen for them, and whether it goes together.
#include <algorithm>
#include <array>
#include <set>

#include "config/chart_layers.hpp"
#include "config/value_text.hpp"

namespace agreed::settings_file {
namespace {

constexpr std::array kOfClassical = {"center", "sigma",    "sigma_degrees_of_freedom", "run_spread", "ewma",
                                     "cusum",  "run_rules"};

struct RuleKey {
  const char* name;
  int RunRules::*count;
};
constexpr RuleKey kRules[] = {{"same_side", &RunRules::same_side},
                              {"trend", &RunRules::trend},
                              {"two_of_three_beyond", &RunRules::two_of_three_beyond},
                              {"four_of_five_beyond", &RunRules::four_of_five_beyond},
                              {"alternating", &RunRules::alternating},
                              {"near_centre", &RunRules::near_centre},
                              {"away_from_centre", &RunRules::away_from_centre}};

RunRules run_rules(const Section& charts) {
  RunRules rules;
  for (const Section& element : charts.list("run_rules"))
    for (const RuleKey& rule : kRules)
      if (element.usable(rule.name)) rules.*rule.count = element.whole_number(rule.name).value_or(0);
  return rules;
}

void check_rules(const Section& charts) {
  std::set<std::string> seen;
  for (const Section& element : charts.list("run_rules")) {
    bool any = false;
    for (const RuleKey& rule : kRules) {
      if (!element.given(rule.name)) continue;
      any = true;
      if (!seen.insert(rule.name).second)
        element.error(rule.name, "found twice, expected each run rule once");
    }
    if (!any && element.exists())
      element.error_here("found no run rule, expected one, such as {same_side: 9}");
  }
}

/// What is wrong within one `charts` section. `charts`: how many of a check standard and a measurand it is
/// for.
void check_section(const Section& charts, const ChartLayers& layers, std::size_t count, bool several_lots) {
  check_rules(charts);
  const auto missing = [&](const char* given, const char* needed, const char* words) {
    if (charts.given(given) && !layers.from(needed).given(needed)) charts.error(given, words);
  };
  missing("sigma", "center", "found without center, expected the centre line of the same study");
  missing("sigma_degrees_of_freedom", "sigma", "found without sigma, expected the sigma they are behind");
  for (const char* key : {"center", "sigma"}) {
    if (!charts.given(key)) continue;
    if (count > 1)
      charts.error(key,
                   "found for " + std::to_string(count) +
                       " of check standard and measurand, expected one: put it under the check standard's "
                       "measurands.NAME.charts");
    else if (several_lots)
      charts.error(key, "found for several lots, expected one lot: the study was made of one");
  }
  if (method_of(layers) == ChartMethod::classical && charts.given("method") &&
      charts.given("in_control_run_length"))
    charts.warning("in_control_run_length",
                   "has no effect on classical charts: their run length follows from their limits");
}

bool uses(const Section& charts) {
  return std::any_of(kOfClassical.begin(), kOfClassical.end(),
                     [&](const char* key) { return charts.given(key); });
}

void complain_of_unused(const Section& charts) {
  for (const char* key : kOfClassical)
    if (charts.given(key))
      charts.error(key, "of classical charts only, expected method: classical beside it");
}

bool classical(const Section& charts) {
  return charts.text("method") == "classical";
}

/// Ids of the measurands a check standard watches.
std::set<std::string> measurands_of(const Section& standard) {
  std::set<std::string> ids;
  for (const Section& measurand : standard.named("measurands")) ids.insert(measurand.id());
  for (const Section& lot : standard.list("lots"))
    for (const Section& measurand : lot.named("measurands")) ids.insert(measurand.id());
  return ids;
}

struct Reach {
  std::size_t count = 0;  ///< of a check standard and a measurand
  bool several_lots = false;
  bool classical = false;  ///< one of them is
};

Reach check_standard(const Section& standard, const Section& general) {
  const Section own = standard.section("charts");
  Reach reach;
  reach.count = measurands_of(standard).size();
  reach.several_lots = standard.list("lots").size() > 1;
  for (const std::string& id : measurands_of(standard))
    reach.classical =
        reach.classical || method_of(layers_of(standard, id, general)) == ChartMethod::classical;
  if (own.exists()) {
    check_section(own, ChartLayers({own, general}), reach.count, reach.several_lots);
    if (uses(own) && !reach.classical) complain_of_unused(own);
  }
  for (const Section& measurand : standard.named("measurands")) {
    const Section charts = measurand.section("charts");
    if (!charts.exists()) continue;
    const ChartLayers layers = layers_of(standard, measurand.id(), general);
    check_section(charts, layers, 1, reach.several_lots);
    if (uses(charts) && method_of(layers) != ChartMethod::classical) complain_of_unused(charts);
  }
  return reach;
}

}  // namespace

const Section& ChartLayers::from(const std::string& name) const {
  const auto found =
      std::find_if(layers_.begin(), layers_.end(), [&](const Section& s) { return s.usable(name); });
  return found == layers_.end() ? layers_.back() : *found;
}

const Section& ChartLayers::having(const std::string& name) const {
  const auto found =
      std::find_if(layers_.begin(), layers_.end(), [&](const Section& s) { return s.given(name); });
  return found == layers_.end() ? layers_.back() : *found;
}

ChartLayers layers_of(const Section& standard, const std::string& measurand, const Section& general) {
  std::vector<Section> layers;
  for (const Section& section : standard.named("measurands"))
    if (section.id() == measurand) layers.push_back(section.section("charts"));
  layers.push_back(standard.section("charts"));
  layers.push_back(general);
  return ChartLayers(std::move(layers));
}

ChartMethod method_of(const ChartLayers& layers) {
  return classical(layers.from("method")) ? ChartMethod::classical : ChartMethod::change_point;
}

ClassicalSettings read_classical(const ChartLayers& layers) {
  ClassicalSettings chosen;
  chosen.center = layers.number("center");
  chosen.sigma = layers.number("sigma");
  chosen.sigma_degrees_of_freedom = layers.number("sigma_degrees_of_freedom");
  if (layers.from("run_spread").text("run_spread") == "range") chosen.run_spread = RunSpread::range;
  const Section ewma = layers.having("ewma").section("ewma"), cusum = layers.having("cusum").section("cusum");
  chosen.ewma_weight = ewma.number("weight");
  chosen.ewma_width = ewma.number("width");
  chosen.cusum_allowance = cusum.number("allowance");
  chosen.cusum_limit = cusum.number("limit");
  chosen.run_rules = run_rules(layers.having("run_rules"));
  return chosen;
}

void check_classical(const Section& top) {
  const Section general = top.section("charts");
  Reach all;
  all.classical = classical(general);
  for (const Section& standard : top.named("check_standards")) {
    const Reach reach = check_standard(standard, general);
    all.count += reach.count;
    all.several_lots = all.several_lots || reach.several_lots;
    all.classical = all.classical || reach.classical;
  }
  if (!general.exists()) return;
  check_section(general, ChartLayers({general}), all.count, all.several_lots);
  if (uses(general) && !all.classical) complain_of_unused(general);
}

}  // namespace agreed::settings_file
