#include "core/pair/proof_plan.hpp"

#include <algorithm>
#include <cmath>

#include "core/base/distributions.hpp"
#include "core/pair/bias.hpp"

namespace agreed {
namespace {
constexpr double kChance = 0.9;  // as `agreed plan` asks
constexpr int kMostPairs = 100'000;

// What is asked of one level: the tail of its interval, and what it is to show.
struct Aim {
  Verdict verdict = Verdict::agreement_shown;
  double tail = kPlainTail;
};

double chance(const LevelEvidence& at, Aim aim, double se, int pairs) {
  const double t = t_quantile_of_tail(aim.tail, pairs - 2), bias = std::abs(at.bias);
  if (!(se > 0)) return 1;
  if (aim.verdict == Verdict::disagreement_shown) return normal_cdf((bias - at.allowable) / se - t);
  return normal_cdf((at.allowable - bias) / se - t) - normal_cdf(t - (at.allowable + bias) / se);
}

// The least number of pairs with the chance asked for; none when that is not to be had.
std::optional<int> pairs_needed(const LevelEvidence& at, Aim aim, int pairs) {
  const auto enough = [&](int n) {
    return chance(at, aim, at.se * std::sqrt(static_cast<double>(pairs) / n), n) >= kChance;
  };
  if (enough(pairs)) return pairs;
  if (!enough(kMostPairs)) return std::nullopt;
  int low = pairs, high = kMostPairs;
  while (high - low > 1) {
    const int middle = low + (high - low) / 2;
    (enough(middle) ? high : low) = middle;
  }
  return high;
}

std::optional<double> factor_needed(const LevelEvidence& at, Aim aim, int pairs) {
  if (chance(at, aim, at.se, pairs) >= kChance) return 1;
  double low = 0, high = 1;
  for (int i = 0; i < 40; ++i) {
    const double middle = (low + high) / 2;
    (chance(at, aim, middle * at.se, pairs) >= kChance ? low : high) = middle;
  }
  return low > 0 ? std::optional(low) : std::nullopt;
}

ProofPlan plan_of(const LevelEvidence& at, Aim aim, int pairs) {
  ProofPlan plan;
  plan.level = at.level;
  plan.bias = at.bias;
  plan.allowable = at.allowable;
  plan.aim = aim.verdict;
  const auto needed = pairs_needed(at, aim, pairs);
  if (!needed) {
    plan.reason = no_plan::bias_as_large_as_allowable;
    return plan;
  }
  plan.more_pairs = *needed - pairs;
  plan.scatter_factor = factor_needed(at, aim, pairs);
  return plan;
}

bool is_beyond(const LevelEvidence& at) {
  return at.covered && std::abs(at.bias) > at.allowable;
}

bool is_slower(const ProofPlan& a, const ProofPlan& b) {
  return b.more_pairs && (!a.more_pairs || *a.more_pairs > *b.more_pairs);
}
}  // namespace

ProofPlan plan_proof(std::span<const LevelEvidence> levels, int pairs, double alert_confidence) {
  const bool beyond = std::any_of(levels.begin(), levels.end(), is_beyond);
  const Aim aim = beyond ? Aim{Verdict::disagreement_shown, (1 - alert_confidence) / 2} : Aim{};
  std::optional<ProofPlan> chosen;
  for (const LevelEvidence& at : levels) {
    if (beyond ? !is_beyond(at) : !at.covered) continue;
    const ProofPlan plan = plan_of(at, aim, pairs);
    if (!chosen || (beyond ? is_slower(*chosen, plan) : is_slower(plan, *chosen))) chosen = plan;
  }
  if (beyond) return *chosen;
  for (const LevelEvidence& at : levels)
    if (!at.covered) {
      ProofPlan plan;
      plan.reason = no_plan::not_covered;
      plan.level = at.level;
      plan.bias = at.bias;
      plan.allowable = at.allowable;
      return plan;
    }
  return *chosen;
}

}  // namespace agreed
