// Run lengths of the limits with run rules.
#include <algorithm>
#include <cmath>
#include <map>
#include <set>
#include <vector>

#include "core/base/distributions.hpp"
#include "core/chart/classical/constants.hpp"
#include "core/chart/classical/run_length.hpp"
#include "core/chart/classical/run_rules.hpp"

namespace agreed::classical {
namespace {
constexpr std::size_t kMostStates = 100'000;
constexpr int kMostSteps = 200'000;
// The share that survives a reading has settled when it has moved by no more than this for so long: longer
// than any pattern, since no rule can signal before its count is reached.
constexpr double kSettled = 1e-13;
constexpr int kSettledFor = 128;

/// A zone of readings that all rules treat alike.
struct Zone {
  double inside = 0;  ///< any reading of the zone
  double chance = 0;
};

/// The zones between the lines that the rules look at. Beyond the limits, if they signal, is left out:
/// nothing comes after it.
std::vector<Zone> zones_of(const RunRules& rules, bool with_limits, double shift) {
  std::set<double> lines = {0};
  const auto line = [&](double at) { lines.insert({-at, at}); };
  if (rules.near_centre > 0 || rules.away_from_centre > 0) line(1);
  if (rules.two_of_three_beyond > 0) line(rules.two_of_three_beyond);
  if (rules.four_of_five_beyond > 0) line(rules.four_of_five_beyond);
  if (with_limits) line(kLimitWidth);
  const std::vector<double> at(lines.begin(), lines.end());
  std::vector<Zone> zones;
  for (std::size_t i = 0; i + 1 < at.size(); ++i)
    zones.push_back({(at[i] + at[i + 1]) / 2, normal_tail(at[i] - shift) - normal_tail(at[i + 1] - shift)});
  if (!with_limits) {
    zones.push_back({at.front() - 1, normal_tail(shift - at.front())});
    zones.push_back({at.back() + 1, normal_tail(at.back() - shift)});
  }
  return zones;
}

struct Step {
  std::size_t to = 0;
  double chance = 0;
};

/// From each state the steps that do not signal; state 0 is the beginning. Empty where there are too many.
std::vector<std::vector<Step>> chain_of(const RunRules& rules, const std::vector<Zone>& zones) {
  std::map<RunRuleMemory, std::size_t> numbers = {{RunRuleMemory{}, 0}};
  std::vector<RunRuleMemory> states = {RunRuleMemory{}};
  std::vector<std::vector<Step>> chain;
  for (std::size_t i = 0; i < states.size(); ++i) {
    if (states.size() > kMostStates) return {};
    std::vector<Step> steps;
    for (const Zone& zone : zones) {
      RunRuleMemory next = states[i];
      if (next.take(zone.inside, rules).any()) continue;
      const auto [entry, is_new] = numbers.try_emplace(next, states.size());
      if (is_new) states.push_back(next);
      steps.push_back({entry->second, zone.chance});
    }
    chain.push_back(std::move(steps));
  }
  return chain;
}

/// Sum over i of the chance that there was no signal up to reading i. Once the share that survives a reading
/// has settled, the rest is a geometric series.
double summed(const std::vector<std::vector<Step>>& chain) {
  std::vector<double> now(chain.size(), 0.0), next(chain.size());
  now[0] = 1;
  double sum = 0, alive = 1, share = 0;
  int settled = 0;
  for (int step = 0; step < kMostSteps; ++step) {
    sum += alive;
    std::fill(next.begin(), next.end(), 0.0);
    for (std::size_t i = 0; i < chain.size(); ++i)
      for (const Step& to : chain[i]) next[to.to] += now[i] * to.chance;
    double left = 0;
    for (const double part : next) left += part;
    now.swap(next);
    const double before = share;
    share = left / alive;
    alive = left;
    settled = std::abs(share - before) < kSettled ? settled + 1 : 0;
    if (!(alive > 0) || settled >= kSettledFor) break;
  }
  return share < 1 ? sum + alive / (1 - share) : kLongestRunLength;
}
}  // namespace

std::optional<double> rules_run_length(const RunRules& rules, bool with_limits, double shift) {
  if (rules.trend > 0 || rules.alternating > 0) return {};
  const bool any_rule = rules.same_side > 0 || rules.two_of_three_beyond > 0 ||
                        rules.four_of_five_beyond > 0 || rules.near_centre > 0 || rules.away_from_centre > 0;
  if (!any_rule) return with_limits ? std::optional(limits_run_length(kLimitWidth, shift)) : std::nullopt;
  const auto chain = chain_of(rules, zones_of(rules, with_limits, shift));
  if (chain.empty()) return {};
  return std::min(kLongestRunLength, summed(chain));
}

}  // namespace agreed::classical
