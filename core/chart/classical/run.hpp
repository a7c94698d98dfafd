#pragma once
// One run: the readings of one measured_at, replicates of each other. A single reading is a run of one.
#include <algorithm>
#include <cmath>
#include <limits>

#include "core/base/instant.hpp"

namespace agreed::classical {

struct Run {
  Instant at{};
  int readings = 0;
  double mean = 0;
  double squares = 0;  ///< about the mean
  double least = std::numeric_limits<double>::infinity(), most = -least;

  /// Welford, Technometrics 4 (1962) 419.
  void add(double value) {
    ++readings;
    const double off = value - mean;
    mean += off / readings;
    squares += off * (value - mean);
    least = std::min(least, value);
    most = std::max(most, value);
  }
  [[nodiscard]] double range() const { return most - least; }
  /// Needs 2 readings.
  [[nodiscard]] double sd() const { return std::sqrt(squares / (readings - 1)); }
};

}  // namespace agreed::classical
