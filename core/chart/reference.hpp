#pragma once
// The mean of a check standard's readings against its reference value.
#include <cstdint>
#include <optional>

#include "core/base/settings.hpp"

namespace agreed {

/// The mean that is compared: of n readings with sample sd s.
struct ComparedMean {
  double mean = 0, sd = 0;
  std::int64_t readings = 0;
};

/// Readings that a bias is judged from.
constexpr std::int64_t kLeastForBias = 30;

/// (mean - reference) / sqrt(U_mean^2 + U_ref^2), both expanded by 2, U_mean = 2 s/sqrt(n): the normalised
/// error E_n of ISO 13528 and ISO/IEC 17043. An uncertainty that is not given counts as none; nothing where
/// neither leaves any.
[[nodiscard]] std::optional<double> normalised_error(const ComparedMean& mean,
                                                     const ReferenceValue& reference);

/// The bias that is still allowed for: U + h s/sqrt(n), U the expanded uncertainty as given, h the limit of
/// the chart's level. Asked at each reading anew, the plain rule E_n > 1 calls falsely in 41 % of standards
/// within 1,000 readings, this one once for good in 0.5 to 4 % (own policy). Nothing below 30 readings, and
/// nothing without an expanded uncertainty: a bias against a value of unknown uncertainty is shown, not
/// judged.
[[nodiscard]] std::optional<double> allowed_bias(const ComparedMean& mean, const ReferenceValue& reference,
                                                 double h);

}  // namespace agreed
