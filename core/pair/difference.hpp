#pragma once
// Purpose: the differences y - x of the window as they are, without a line.
// Inputs: pairs in the measurand's unit; allowable difference at the level x.
// Method: mean, sd and limits of agreement mean +- z sd, z = 0.975 normal quantile, with intervals (J. M.
// Bland
//   and D. G. Altman, Stat. Methods Med. Res. 8 (1999) 135: var = s^2 (1/n + z^2/(2(n-1))), quantile t(n-1;
//   0.975)); share within the allowable difference with its exact binomial interval (C. J. Clopper and E. S.
//   Pearson, Biometrika 26 (1934) 404); paired t test.
// Assumptions: differences independent and near normal, of constant spread.
//   When what is allowable is given in percent only, mean and limits also of 100 (y - x) / ((x + y) / 2)
//   (same authors: the spread then grows with the level).
// Degenerate: fewer than 2 pairs: nothing. All differences equal: no paired t. A pair whose mean is not
//   positive: no percent.
// Cost: O(n).
#include <optional>
#include <span>

#include "core/base/settings.hpp"
#include "core/pair/comparison_view.hpp"
#include "core/pair/moments.hpp"

namespace agreed {

/// Exact interval of a proportion, `count` of `of` (0 <= count <= of, of > 0), each tail (1 - confidence)
/// / 2.
[[nodiscard]] Interval proportion_interval(int count, int of, double confidence);

[[nodiscard]] std::optional<DifferenceView> describe_differences(
    std::span<const Point> points, const std::optional<AllowableDifference>& allowable);

}  // namespace agreed
