#include "core/plan/proof_simulation.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>
#include <vector>

#include "core/pair/bias.hpp"
#include "core/pair/replicate_errors.hpp"
#include "core/pair/t_table.hpp"
#include "core/pair/window_fit.hpp"
#include "core/plan/proof_power.hpp"

namespace agreed::plan {
namespace {
/// What all trials share.
struct Rule {
  Rule(const Settings& settings, ComparisonIndex comparison)
      : config(settings.of(comparison)), aims(proof_aims(settings.of(config.measurand))), t(kPlainTail) {
    if (const auto& decimals = settings.of(config.measurand).decimals)
      resolution = std::pow(10.0, -*decimals);
  }

  const ComparisonSettings& config;
  std::vector<ProofAim> aims;
  TTable t;
  double resolution = 0;
};

/// Whether the window shows agreement now, at every level.
bool shows(Rule& rule, const Window& window, const ErrorRatio& ratio) {
  const WindowFit fit = fit_window(window, ratio, rule.config.fit);
  if (!fit.exists()) return false;
  const double t = rule.t.at(fit.degrees_of_freedom());
  return std::all_of(rule.aims.begin(), rule.aims.end(), [&](const ProofAim& aim) {
    const Bias bias = bias_at(fit.line, fit.jackknife, aim.level);
    return fit.covers(aim.level) && position_of(bias, t, aim.allowable) == Position::inside;
  });
}

bool is_shown_at(Rule& rule, const PairConditions& conditions, double bias, int pairs, RandomNormal& draw) {
  const bool of_replicates = rule.config.error_ratio.source == ErrorSource::replicates;
  ErrorRatio ratio = of_replicates ? conditions.ratio : ratio_as_known(conditions.ratio, draw);
  ReplicatePool pool(rule.config.error_growth);
  Window window(rule.config.window_pairs, std::nullopt);
  for (int i = 1; i <= pairs; ++i) {
    const Pair pair = draw_pair(conditions, {}, bias, rule.resolution, Instant{}, draw);
    window.insert({pair.x, pair.y},
                  {pair.at, i, 1.0 / conditions.x_replicates, 1.0 / conditions.y_replicates});
    if (of_replicates) pool.add(pair);
    if (i <= pairs - rule.config.confirm) continue;
    if (of_replicates) ratio = pool.ratio();
    if (!shows(rule, window, ratio)) return false;
  }
  return true;
}
}  // namespace

int least_pairs_for_proof(const ComparisonSettings& comparison) {
  // The first pair with a verdict shows `inconclusive` whatever it says.
  return comparison.least_pairs + std::max(comparison.confirm - 1, 1);
}

Simulated simulated_proof_power(const Settings& settings, ComparisonIndex comparison,
                                const PairConditions& conditions, double bias, int pairs,
                                const Trials& trials) {
  require_valid(conditions);
  if (trials.count < 1) throw std::invalid_argument("count: expected at least one trial");
  Rule rule(settings, comparison);
  if (rule.aims.empty() || pairs < least_pairs_for_proof(rule.config)) return {};
  int shown = 0;
  for (int trial = 0; trial < trials.count; ++trial) {
    RandomNormal draw(trials.seed, static_cast<std::uint64_t>(trial));
    shown += is_shown_at(rule, conditions, bias, pairs, draw) ? 1 : 0;
  }
  return share_of(shown, trials.count);
}

}  // namespace agreed::plan
