#include "core/plan/proof_search.hpp"

#include <algorithm>
#include <cmath>
#include <functional>
#include <stdexcept>

#include "core/plan/proof_simulation.hpp"

namespace agreed::plan {
namespace {
constexpr int kMostPairs = 100'000;
constexpr double kStride = 1.1;  // until one number is enough and another is not
constexpr double kUsualSteps = 10, kMostDone = 0.95;
constexpr double kMostPower = 0.999;
constexpr double kLargestFactor = 1'000;

int pairs_held(const ComparisonSettings& comparison) {
  if (!comparison.window_age || comparison.every <= Duration::zero()) return comparison.window_pairs;
  const auto in_time = *comparison.window_age / comparison.every + 1;
  return static_cast<int>(std::min<std::int64_t>(comparison.window_pairs, in_time));
}

/// The x between `holds` and `fails` where a condition ceases to hold, from the side on which it holds;
/// geometric halving.
double border(double holds, double fails, const std::function<bool(double)>& condition) {
  for (int i = 0; i < 40; ++i) {
    const double middle = std::sqrt(holds * fails);
    (condition(middle) ? holds : fails) = middle;
  }
  return holds;
}
}  // namespace

ProofSearch::ProofSearch(const Settings& settings, ComparisonIndex comparison,
                         const PairConditions& conditions, const ProofWish& wish, const Trials& trials)
    : settings_(settings), comparison_(comparison), conditions_(conditions), wish_(wish), trials_(trials) {
  require_valid(conditions);
  if (!(wish.power > 0 && wish.power < 1)) throw std::invalid_argument("power: expected one between 0 and 1");
  if (!std::isfinite(wish.bias)) throw std::invalid_argument("bias: expected a finite one");
  if (trials.count < 1) throw std::invalid_argument("count: expected at least one trial");
  needs_.aims = proof_aims(settings.of(config().measurand));
  needs_.capacity = pairs_held(config());
  least_ = least_pairs_for_proof(config());
  needs_.reason = hindrance();
  if (needs_.reason.empty()) begin();
}

double ProofSearch::closed(int pairs, double errors, double allowable) const {
  std::vector<ProofAim> aims = needs_.aims;
  for (ProofAim& aim : aims) aim.allowable *= allowable;
  return proof_power(conditions_.with_errors(errors), aims, config().fit, wish_.bias, pairs).all;
}

std::optional<int> ProofSearch::closed_pairs(double power, int from, int most) const {
  if (from > most) return std::nullopt;
  int enough = from, too_few = from - 1;
  while (closed(enough) < power) {
    if (enough == most) return std::nullopt;
    too_few = enough;
    enough = std::min(most, 2 * enough);
  }
  while (enough - too_few > 1) {
    const int middle = too_few + (enough - too_few) / 2;
    (closed(middle) >= power ? enough : too_few) = middle;
  }
  return enough;
}

// What makes any simulation useless.
std::string_view ProofSearch::hindrance() {
  if (settings_.of(config().measurand).decision_levels.empty()) return no_proof::no_decision_levels;
  if (needs_.aims.empty()) return no_proof::no_allowable_difference;
  for (const ProofAim& aim : needs_.aims)
    if (!(std::abs(wish_.bias) < aim.allowable)) {
      needs_.level = aim.level;
      if (needs_.capacity >= least_) explain(needs_.capacity);
      return no_proof::bias_as_large_as_allowable;
    }
  for (const ProofAim& aim : needs_.aims)
    if (conditions_.samples.chance_to_cover(aim.level, needs_.capacity) < wish_.power) {
      needs_.level = aim.level;
      return no_proof::not_covered;
    }
  return {};
}

void ProofSearch::begin() {
  if (needs_.capacity < least_) return conclude(needs_.capacity, {});
  const auto by_formula = closed_pairs(wish_.power, least_, needs_.capacity);
  // The first of the pairs in a row is to show it already.
  next_ = by_formula ? std::min(*by_formula + config().confirm - 1, needs_.capacity) : needs_.capacity;
}

bool ProofSearch::step() {
  if (next_ == 0) return false;
  ++steps_;
  const Simulated power =
      simulated_proof_power(settings_, comparison_, conditions_, wish_.bias, next_, trials_);
  const bool reached = power.value >= wish_.power;
  (reached ? enough_ : too_few_) = next_;
  (reached ? at_enough_ : at_too_few_) = power;
  choose_next();
  return next_ != 0;
}

void ProofSearch::choose_next() {
  if (enough_ == 0) {
    if (too_few_ == needs_.capacity) return conclude(too_few_, at_too_few_);
    next_ = std::min(needs_.capacity, static_cast<int>(kStride * too_few_) + 1);
  } else if (enough_ <= std::max(least_, too_few_ + 1)) {
    conclude(enough_, at_enough_);
  } else if (too_few_ == 0) {
    next_ = std::max(least_, static_cast<int>(enough_ / kStride));
  } else {
    next_ = too_few_ + (enough_ - too_few_) / 2;
  }
}

double ProofSearch::share_done() const {
  return next_ == 0 ? 1.0 : std::min(steps_ / kUsualSteps, kMostDone);
}

void ProofSearch::conclude(int pairs, Simulated power) {
  next_ = 0;
  needs_.power = power;
  if (enough_ > 0) needs_.pairs = pairs;
  if (pairs >= 3) {
    const ProofPower formula = proof_power(conditions_, needs_.aims, config().fit, wish_.bias, pairs);
    needs_.closed_form = formula.all;
    const auto least = std::min_element(formula.levels.begin(), formula.levels.end());
    needs_.level = needs_.aims[static_cast<std::size_t>(least - formula.levels.begin())].level;
  }
  if (needs_.pairs) return;
  needs_.reason = no_proof::window_too_small;
  explain(pairs);
}

void ProofSearch::explain(int pairs) {
  const int start = std::max(pairs, least_);
  const double lacking = std::max(0.0, needs_.closed_form - needs_.power.value);
  const double power =
      std::min(wish_.power + (pairs < least_ ? 0 : lacking), std::max(kMostPower, wish_.power));
  needs_.pairs_in_larger_window = closed_pairs(power, start, kMostPairs);
  if (pairs < least_) return;  // the rule asks for more, whatever they say
  const auto errors = [&](double factor) { return closed(pairs, factor, 1) >= power; };
  const auto allowable = [&](double factor) { return closed(pairs, 1, factor) >= power; };
  if (errors(1 / kLargestFactor)) needs_.sd_factor = border(1 / kLargestFactor, 1, errors);
  if (allowable(kLargestFactor)) needs_.allowable_factor = border(kLargestFactor, 1, allowable);
}

}  // namespace agreed::plan
