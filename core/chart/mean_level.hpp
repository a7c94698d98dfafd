#pragma once
// The level of a chart over some of its readings, and what two such levels differ by.
#include <cstdint>
#include <optional>

#include "core/base/instant.hpp"

namespace agreed {

/// In the measurand's unit. A run of replicates counts as one reading.
struct MeanLevel {
  Instant from{}, to{};
  std::int64_t readings = 0;
  double mean = 0;
  double variance = 0;       ///< of one reading
  std::int64_t degrees = 0;  ///< of that variance
};

struct MeanDifference {
  double difference = 0, low = 0, high = 0;
  double confidence = 0.95;
};

/// after - before with its 95 % interval, the variances not taken for equal (B. L. Welch, Biometrika 34
/// (1947) 28). Readings are taken for independent. Nothing where a level has no degrees of freedom, or
/// neither has any scatter: then no interval can be told.
[[nodiscard]] std::optional<MeanDifference> difference_of(const MeanLevel& before, const MeanLevel& after);

}  // namespace agreed
