#pragma once
// lambda from check standards or from the configuration, with the F-interval of a variance ratio.
#include <span>
#include <string>

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

/// Of errors that grow: lambda = var x / var y at `level`, its interval on the degrees of freedom there.
[[nodiscard]] ErrorRatio ratio_of(const ErrorModel& x, const ErrorModel& y, double level);

/// The mean level of standards, by degrees of freedom: where `lambda` of a mixed model is stated.
[[nodiscard]] double mean_level(std::span<const Repeatability> x, std::span<const Repeatability> y);

/// From the check standards of both analyzers, errors going with the level as `growth` says. The reason why
/// there is none names measurand and analyzer.
[[nodiscard]] ErrorRatio ratio_from_standards(std::span<const Repeatability> x,
                                              std::span<const Repeatability> y, ErrorGrowth growth,
                                              const std::string& measurand, const std::string& on_x,
                                              const std::string& on_y);

/// As configured: given sds (interval of no width), or a bare lambda (a factor 2 either way). Of errors that
/// are proportional to the level lambda is the ratio of their squared coefficients of variation.
[[nodiscard]] ErrorRatio given_ratio(const ErrorRatioSettings& settings,
                                     ErrorGrowth growth = ErrorGrowth::constant);

}  // namespace agreed
