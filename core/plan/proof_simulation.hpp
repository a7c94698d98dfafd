#pragma once
// The power of `agreement_shown` for n pairs by simulation, of the rule as it is: pairs are drawn, the
// service's own fit (core/pair/window_fit.hpp: Deming, weighted or York, jackknife) is made at each of the
// last `confirm` pairs, and all decision levels must be covered and shown there. Where the error ratio is an
// estimate, each trial has its own, with the error of its degrees of freedom. Left out: outliers and changes
// found falsely. Cost: about 20 us a trial of 100 pairs.
#include "core/base/settings.hpp"
#include "core/plan/pair_conditions.hpp"
#include "core/plan/trial.hpp"

namespace agreed::plan {

/// The first pair at which the verdict can be `agreement_shown`.
[[nodiscard]] int least_pairs_for_proof(const ComparisonSettings& comparison);

/// The chance that the verdict is `agreement_shown` at the `pairs`-th pair, when the true bias is `bias` at
/// all levels; 0 below the least number of pairs. Of more pairs than the window holds the newest count.
/// Results are rounded to the configured decimals. trials.horizon is not used. Throws as require_valid does.
[[nodiscard]] Simulated simulated_proof_power(const Settings& settings, ComparisonIndex comparison,
                                              const PairConditions& conditions, double bias, int pairs,
                                              const Trials& trials);

}  // namespace agreed::plan
