#pragma once
// Purpose: by how much the check standards of one analyzer moved at a moment that the pairs suggest.
// Inputs: the readings of each chart, oldest first, in the measurand's unit; the moment, and since when
//   readings count; the resolution of the results, 0 when not known.
// Method: mean after less mean before, each chart within the stretch (lot, intervention) in which the moment
//   lies; standard error from the pooled variance about the two means, not below resolution^2 / 12, widened
//   by df / (df - 2), the variance of Student's t, so that few readings do not look surer than they are.
//   Several standards of an analyzer are pooled by inverse variance. Readings that a chart has set aside:
//   those before the moment are left out, since an excursion that has ended says nothing of the usual level;
//   those after it count, since they are the very excursion asked about. One wild reading after it widens the
//   standard error along with the shift.
// Assumptions: readings independent and near normal; the standards shift alike (a proportional change is
//   pooled to a mean one).
// Degenerate: fewer than 2 readings before, none after, or fewer than 3 degrees of freedom: no shift; what a
//   reading's standard deviation is may be known all the same.
// Cost: O(readings).
#include <optional>
#include <span>
#include <vector>

#include "core/chart/check_point.hpp"
#include "core/diagnosis/attribution.hpp"

namespace agreed {

struct CheckShift {
  std::optional<Shift> shift;
  std::optional<double> sd;   ///< of one reading
  int before = 0, after = 0;  ///< readings that count
};

struct Moment {
  Instant since;       ///< readings before this do not count
  Instant started_at;  ///< the first that counts as after
};

[[nodiscard]] CheckShift check_shift(std::span<const CheckPoint> readings, const Moment& moment,
                                     double resolution);

/// Of one analyzer, from the shifts of its charts.
[[nodiscard]] CheckShift pooled(std::span<const CheckShift> charts);

/// What `more` readings after the moment would leave of a shift, should they show `expected`. Nothing where
/// no reading counts before it.
[[nodiscard]] std::optional<Shift> after_more_readings(const CheckShift& checks, int more, double expected);

}  // namespace agreed
