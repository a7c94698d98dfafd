#pragma once
// What run length a classical chart really has, as chosen: everything together, and with limits that rest on
// a short baseline or on a study with few degrees of freedom.
//
// Method. With centre and sigma known: exactly where only the limits and the moving range are on (integral
// equation), else the mean of simulated run lengths. With limits from a baseline of n readings the run length
// differs from chart to chart, and its mean over baselines is dominated by a few lucky ones; what counts for
// the alarm budget is the mean rate of false signals. So baselines are simulated, each followed for
// `kReadingsEach` readings with the tests started afresh after every signal, and the run length given is all
// readings over all signals. The same with a given sigma on few degrees of freedom, whose error is drawn
// instead of a baseline. Runs of one reading, independent and normal.
//
// A fixed seed makes all of it a pure function of what was chosen. Cost: up to 0.4 s; the caller keeps the
// result. Accuracy: the standard errors that come with it, about 1 and 2 %.
#include "core/base/settings.hpp"

namespace agreed::classical {

/// The run length of what was chosen for a chart whose baseline has `baseline` readings.
[[nodiscard]] ExpectedRunLength expected_run_length(const ClassicalSettings& chosen, int baseline);

/// Whether all seven run rules are on, beside the limits that always are.
[[nodiscard]] bool all_run_rules(const RunRules& rules);

struct SimulatedRunLength {
  double readings = 0, standard_error = 0;
};

/// With centre and sigma known: the mean of `runs` run lengths. `with_moving_range`: its limit counts too.
[[nodiscard]] SimulatedRunLength simulated_run_length(const ClassicalSettings& chosen, bool with_moving_range,
                                                      int runs, std::uint64_t seed);

/// With limits from a baseline (or, where centre and sigma are given, from a sigma on that many degrees of
/// freedom): readings per false signal over `charts` simulated charts.
[[nodiscard]] SimulatedRunLength simulated_with_own_limits(const ClassicalSettings& chosen, int baseline,
                                                           int charts, std::uint64_t seed);

}  // namespace agreed::classical
