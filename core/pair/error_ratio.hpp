#pragma once
// lambda from check standards or from the configuration (3-statistics 3.1; F-interval of a variance ratio).
#include <span>

#include "core/base/settings.hpp"
#include "core/chart/repeatability.hpp"
#include "core/pair/pair.hpp"

namespace agreed {

/// Pools several standards of one measurand on one analyzer by their degrees of freedom; unknown ones are
/// left out.
[[nodiscard]] ErrorVariance pooled(std::span<const Repeatability> standards);

/// lambda = x.variance / y.variance; low = lambda / F(0.975; nu_x, nu_y), high = lambda * F(0.975; nu_y,
/// nu_x).
[[nodiscard]] ErrorRatio ratio_of(const ErrorVariance& x, const ErrorVariance& y);

/// As configured: given sds (interval of no width), or a bare lambda (a factor 2 either way).
[[nodiscard]] ErrorRatio given_ratio(const ErrorRatioSettings& settings);

}  // namespace agreed
