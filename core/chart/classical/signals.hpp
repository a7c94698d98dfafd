#pragma once
// The signals of one run on a classical chart, as a set, and the pattern they make.
#include <cstdint>
#include <vector>

#include "core/chart/chart_view.hpp"

namespace agreed::classical {

/// What signals tell: a reading beyond the limits, a lasting shift (EWMA, cumulative sum, run rules), more
/// scatter.
enum class Pattern : std::uint8_t { single_reading, shift, scatter };
[[nodiscard]] const char* to_string(Pattern pattern);

class Signals {
 public:
  void add(ChartSignal signal, bool given = true) { bits_ |= given ? bit(signal) : 0U; }
  [[nodiscard]] bool has(ChartSignal signal) const { return (bits_ & bit(signal)) != 0; }
  [[nodiscard]] bool any() const { return bits_ != 0; }
  /// In the order of ChartSignal.
  [[nodiscard]] std::vector<ChartSignal> all() const;
  /// The first of the three that they tell; needs any().
  [[nodiscard]] Pattern pattern() const;
  [[nodiscard]] bool shift() const;

 private:
  static std::uint32_t bit(ChartSignal signal) { return 1U << static_cast<unsigned>(signal); }
  std::uint32_t bits_ = 0;
};

}  // namespace agreed::classical
