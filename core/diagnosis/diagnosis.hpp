#pragma once
// Purpose: since when the relation of two analyzers is another, which of them moved, and how sure that is; or
//   what will tell.
// Inputs: an open change of a comparison; what the check standards of each analyzer did over the same before
//   and after (check_shift.hpp); the settings, for names and units.
// Method: attribution.hpp. The most probable explanation is named from a probability of 0.9 on; below that
//   `undecided`, and the fewest further check readings that would decide it if they show what the most
//   probable explanation expects.
// Not folded: worked out from the present state whenever it is shown or told, so it changes as readings come.
// Degenerate: no moment, or too few pairs on either side of it: `undecided`, in words why.
// Cost: O(1) beside the text.
#include <optional>

#include "core/base/settings.hpp"
#include "core/diagnosis/check_shift.hpp"
#include "core/diagnosis/pair_shift.hpp"
#include "core/pair/comparison_change.hpp"

namespace agreed {

/// An explanation is named from this probability on.
inline constexpr double claim_from = 0.9;

[[nodiscard]] DiagnosisView diagnose(const ComparisonChange& change, const CheckShift& x, const CheckShift& y,
                                     const Settings& settings, ComparisonIndex comparison);

/// Check readings that would decide, if they go on as the most probable explanation expects.
struct MoreReadings {
  int on_x = 0, on_y = 0;
};
/// Nothing when 50 on each would not.
[[nodiscard]] std::optional<MoreReadings> readings_to_decide(const ShiftEstimates& shifts,
                                                             const CheckShift& x, const CheckShift& y);

}  // namespace agreed
