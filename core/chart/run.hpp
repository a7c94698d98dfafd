#pragma once
// A run of replicates: the readings of one check standard that share their time. The chart's point is their
// mean; what the run tells besides is how its replicates scatter.
#include <span>

#include "core/base/event.hpp"
#include "core/base/instant.hpp"

namespace agreed {

/// Readings closer than this part of their size are the same: conversions of units leave such gaps.
inline constexpr double kSameReading = 1e-12;
/// So that sums stay finite; no unit makes a larger one a measurement.
inline constexpr double kLargestDeviation = 1e120;

/// A single reading is a run of one. Values in the measurand's unit.
struct Run {
  Instant at{};
  double mean = 0;
  int replicates = 1;
  double squares = 0;  ///< of the replicates about their mean
  double step = 0;     ///< smallest gap between two different replicates; 0: none differ
};

/// The run of one or more readings of one time, centred on the first of them. Replicates closer than 1e-12 of
/// their size are the same: conversions of units leave such gaps. O(k log k).
[[nodiscard]] Run run_of(std::span<const CheckReading> readings);

}  // namespace agreed
