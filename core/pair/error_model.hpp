#pragma once
// Purpose: how the error variance of one analyzer's single results goes with the level.
// Inputs: what check standards (or replicates) say: a variance s^2 on nu degrees of freedom at a level each,
//   in the measurand's unit.
// Method: variance(L) = a^2 + b^2 L^2 with a, b >= 0; b = 0: constant, a = 0: proportional (sd = b |L|),
// both:
//   mixed. Maximum likelihood with nu s^2 / variance(L) ~ chi-squared on nu, so each standard counts by its
//   degrees of freedom: in closed form for one parameter (the pool of s^2, or of s^2/L^2); for two the
//   one-dimensional likelihood of the share p of b^2 L^2 in the variance, p in [0, 1], is searched.
// Assumptions: errors normal, standards independent, the three shapes as far as the standards' levels reach;
//   beyond them the model is an extrapolation.
// Accuracy: parameters to 1e-12 relative; the degrees of freedom at a level are those of the variance there
//   by the information matrix (2 V^2 / var V), also where a or b is held at zero.
// Degenerate: `reason` says why there is no model: nothing known, a standard at level zero (proportional),
//   fewer than two levels a fifth apart (mixed).
// Cost: O(standards); mixed about 2 us for three standards.
#include <span>
#include <string_view>

#include "core/base/settings.hpp"
#include "core/chart/repeatability.hpp"

namespace agreed {

/// Why there is no model.
namespace no_model {
inline constexpr std::string_view not_known = "repeatability_not_known";
inline constexpr std::string_view at_zero = "standard_at_level_zero";
inline constexpr std::string_view one_level = "standards_at_one_level";
}  // namespace no_model

struct ErrorModel {
  ErrorGrowth growth = ErrorGrowth::constant;
  std::string_view reason;
  double at_zero = 1;   ///< a^2: variance at level zero
  double relative = 0;  ///< b^2: what L^2 is multiplied by
  /// Variances and covariance of (a^2, b^2) as estimates; zero: given, or known in proportion only.
  double at_zero_variance = 0, covariance = 0, relative_variance = 0;

  [[nodiscard]] bool exists() const { return reason.empty(); }
  /// Variance of a single result's error at a level.
  [[nodiscard]] double variance_at(double level) const { return at_zero + relative * level * level; }
  /// Of that variance; 0 when it is no estimate.
  [[nodiscard]] double degrees_of_freedom_at(double level) const;

  bool operator==(const ErrorModel&) const = default;
};

/// The model of that shape which the standards speak for; unknown ones are left out.
[[nodiscard]] ErrorModel fit_error_model(ErrorGrowth growth, std::span<const Repeatability> standards);

}  // namespace agreed
