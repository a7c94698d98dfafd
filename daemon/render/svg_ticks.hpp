#pragma once
// Where an axis has its ticks and what they say.
#include <string>
#include <vector>

namespace agreed {

struct Tick {
  double at = 0;
  std::string label;
};

/// Ticks at multiples of 1, 2 or 5 times a power of ten within [low, high], about `wanted` of them, all with
/// the same decimals. Empty unless low < high and both are finite.
[[nodiscard]] std::vector<Tick> value_ticks(double low, double high, int wanted);

/// The same for times in milliseconds since 1970 UTC: at round minutes, hours, days, or months, in UTC; at
/// most `most`. Labels "06:00", "3 Feb", "Feb 2026"; a midnight among hours shows its day.
[[nodiscard]] std::vector<Tick> time_ticks(double low, double high, int most);

}  // namespace agreed
