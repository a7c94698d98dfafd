#pragma once
// Mean readings until a classical chart signals, each part worked out exactly: with centre and sigma known,
// independent normal readings whose mean is `shift` sigma off the centre, tests starting afresh.
//
// Integral equations are solved by Gauss-Legendre quadrature. What would exceed kLongestRunLength is that.
// Accuracy 1e-6 relative or better up to there within the ranges that the configuration allows.
#include <optional>

#include "core/base/settings.hpp"

namespace agreed::classical {

inline constexpr double kLongestRunLength = 1e9;

/// Of the limits centre +- `width` sigma alone: 1 / P(beyond). 370.40 at 3.
[[nodiscard]] double limits_run_length(double width, double shift = 0);

/// Of the limits centre +- 3 sigma and moving ranges up to 3.267 MRbar together. Integral equation after
/// Crowder, J. Qual. Technol. 19 (1987) 98.
[[nodiscard]] double individuals_run_length(double shift = 0);

/// Of an EWMA with limits of constant (asymptotic) width, starting at the centre. Integral equation after
/// Crowder, Technometrics 29 (1987) 401. 0.01 <= weight <= 1, width > 0.
[[nodiscard]] double ewma_run_length_asymptotic(double weight, double width, double shift = 0);

/// The same with the exact limits, which are narrower for the first readings: the density of E is carried on
/// reading by reading until the limits have settled.
[[nodiscard]] double ewma_run_length(double weight, double width, double shift = 0);

/// Of one side of a tabular cumulative sum from 0. Integral equation after Page, Biometrika 41 (1954) 100.
/// 0 < limit <= 100.
[[nodiscard]] double cusum_run_length_one_sided(double allowance, double limit, double shift = 0);

/// Of both sides: 1/both = 1/upper + 1/lower (Kemp 1961; van Dobben de Bruyn 1968).
[[nodiscard]] double cusum_run_length(double allowance, double limit, double shift = 0);

/// Of the limits, if `with_limits`, and run rules: a Markov chain over what the rules remember (Champ and
/// Woodall, Technometrics 29 (1987) 393). Nothing where `trend` or `alternating` is on (they depend on more
/// than the zone a reading falls into), where the chain would have more than 100,000 states, or where there
/// is nothing to signal.
[[nodiscard]] std::optional<double> rules_run_length(const RunRules& rules, bool with_limits = true,
                                                     double shift = 0);

}  // namespace agreed::classical
