#include "core/chart/run.hpp"

#include <algorithm>
#include <cmath>
#include <vector>

namespace agreed {
namespace {
double deviation_from(const CheckReading& first, const CheckReading& reading) {
  return std::clamp(reading.value - first.value, -kLargestDeviation, kLargestDeviation);
}

double smallest_gap(std::span<const CheckReading> readings) {
  std::vector<double> values;
  for (const CheckReading& reading : readings) values.push_back(reading.value);
  std::sort(values.begin(), values.end());
  double smallest = 0;
  for (std::size_t i = 1; i < values.size(); ++i) {
    const double gap = values[i] - values[i - 1];
    if (gap > kSameReading * std::abs(values[i]) && (smallest <= 0 || gap < smallest)) smallest = gap;
  }
  return smallest;
}
}  // namespace

Run run_of(std::span<const CheckReading> readings) {
  const CheckReading& first = readings.front();
  if (readings.size() == 1) return {first.measured_at, first.value};
  const auto k = static_cast<double>(readings.size());
  double sum = 0;
  for (const CheckReading& reading : readings) sum += deviation_from(first, reading);
  const double centre = sum / k;
  double squares = 0;
  for (const CheckReading& reading : readings) {
    const double deviation = deviation_from(first, reading) - centre;
    squares += deviation * deviation;
  }
  return {first.measured_at, first.value + centre, static_cast<int>(readings.size()), squares,
          smallest_gap(readings)};
}

}  // namespace agreed
