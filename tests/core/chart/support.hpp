#pragma once
// Charts of Harrow Mill for the tests, and slow, obvious ways to compute what they compute.
#include <cmath>
#include <cstdio>
#include <limits>
#include <random>
#include <string>
#include <vector>

#include "core/chart/chart.hpp"
#include "core/chart/stretch.hpp"

namespace agreed::test {

inline Settings mill(double run_length, int split_memory = 400) {
  Settings settings;
  settings.site = "Harrow Mill";
  settings.analyzers = {{"line1", ""}, {"line2", ""}};
  Measurand protein;
  protein.id = "protein";
  protein.unit = "g/100 g";
  settings.measurands = {protein};
  settings.standards = {{"wheat-high", ""}, {"wheat-low", ""}};
  ChartSettings chart;
  chart.standard = {1};
  chart.split_memory = split_memory;
  chart.level_run_length = chart.precision_run_length = run_length;
  chart.lots = {{"2026-A", {}, {}}};
  settings.charts = {chart};
  return settings;
}

inline Instant hour(std::int64_t n) {
  return Instant{std::chrono::hours(n)};
}

/// A chart that is fed one reading an hour.
struct Fed {
  explicit Fed(const Settings& settings) : chart(settings, {0}) {}
  void read(double value) { chart.add(CheckReading{hour(++hours), {0}, {1}, {0}, 0, value}, findings); }
  void read_run(const std::vector<double>& values) {
    std::vector<CheckReading> run;
    ++hours;
    for (const double value : values)
      run.push_back({hour(hours), {0}, {1}, {0}, static_cast<std::int32_t>(run.size()), value});
    chart.add(run, findings);
  }
  void intervene(InterventionKind kind) {
    chart.add(Intervention{hour(hours), {0}, {}, {}, kind, ""}, findings);
  }
  [[nodiscard]] bool unstable() const { return chart.state() == ChartState::unstable; }

  Chart chart;
  std::vector<Finding> findings;
  std::int64_t hours = 0;
};

inline std::string text_of(const Finding& finding, const std::string& name) {
  for (const auto& [key, value] : finding.details)
    if (key == name && std::holds_alternative<std::string>(value)) return std::get<std::string>(value);
  return "";
}
inline double number_of(const Finding& finding, const std::string& name) {
  for (const auto& [key, value] : finding.details)
    if (key == name && std::holds_alternative<double>(value)) return std::get<double>(value);
  return std::numeric_limits<double>::quiet_NaN();
}

inline Stretch stretch_of(const std::vector<double>& values, int split_memory = 400,
                          std::optional<double> resolution = {}) {
  Stretch stretch(split_memory, resolution);
  for (std::size_t i = 0; i < values.size(); ++i)
    stretch.append(hour(static_cast<std::int64_t>(i)), values[i], static_cast<std::int64_t>(i));
  return stretch;
}

/// Two-pass mean and sum of squares about it of values[from, to), in long double.
struct Moments {
  long double mean = 0, squares = 0;
  Moments(const std::vector<double>& values, std::size_t from, std::size_t to) {
    for (std::size_t i = from; i < to; ++i) mean += values[i];
    mean /= static_cast<long double>(to - from);
    for (std::size_t i = from; i < to; ++i) squares += (values[i] - mean) * (values[i] - mean);
  }
};

inline double smallest_step(const std::vector<double>& values) {
  double step = std::numeric_limits<double>::infinity();
  for (const double a : values)
    for (const double b : values)
      if (std::abs(a - b) > 1e-11) step = std::min(step, std::abs(a - b));
  return std::isfinite(step) ? step : 0;
}

struct BestSplit {
  std::size_t before = 0;
  double value = -std::numeric_limits<double>::infinity();
};

/// The definition of 3-statistics 3.2, split by split: signed t of the largest |t|.
inline BestSplit level_by_definition(const std::vector<double>& values, double resolution,
                                     std::size_t memory = 400) {
  const std::size_t n = values.size();
  const Moments all(values, 0, n);
  BestSplit best;
  double sign = 1;
  for (std::size_t k = std::max<std::size_t>(3, n > memory ? n - memory : 0); k < n; ++k) {
    const Moments before(values, 0, k), after(values, k, n);
    const long double difference = after.mean - before.mean;
    const auto between = static_cast<double>(static_cast<long double>(k * (n - k)) /
                                             static_cast<long double>(n) * difference * difference);
    const double rest = std::max(static_cast<double>(before.squares + after.squares),
                                 static_cast<double>(n - 2) * resolution * resolution / 12);
    const double t = std::sqrt(static_cast<double>(n - 2) * between / rest);
    if (t > best.value * (1 + 1e-11) || best.before == 0) {
      best = {k, t};
      sign = difference > 0 ? 1 : -1;
    }
  }
  best.value *= sign;
  return best;
}

inline double variance_ratio(const std::vector<double>& values, std::size_t k, double resolution) {
  const std::size_t n = values.size();
  const double floor = resolution * resolution / 12;
  const auto before = static_cast<double>(Moments(values, 0, k).squares) / static_cast<double>(k - 1);
  const auto after = static_cast<double>(Moments(values, k, n).squares) / static_cast<double>(n - k - 1);
  return std::max(after, floor) / std::max(before, floor);
}

/// Paulson's z, written out once more.
inline BestSplit precision_by_definition(const std::vector<double>& values, double resolution,
                                         std::size_t memory = 400) {
  const std::size_t n = values.size();
  BestSplit best;
  for (std::size_t k = std::max<std::size_t>(5, n > memory ? n - memory : 0); k + 2 <= n; ++k) {
    const double f = variance_ratio(values, k, resolution);
    const double a = 2.0 / 9.0 / static_cast<double>(n - k - 1), b = 2.0 / 9.0 / static_cast<double>(k - 1);
    const double z = ((1 - b) * std::pow(f, 1.0 / 3) - (1 - a)) / std::sqrt(b * std::pow(f, 2.0 / 3) + a);
    if (z > best.value) best = {k, z};
  }
  return best;
}

/// Normal readings from a fixed seed, which is printed.
class Readings {
 public:
  explicit Readings(std::uint64_t seed) : engine_(seed) {
    std::printf("seed %llu\n", static_cast<unsigned long long>(seed));
  }
  double operator()() { return normal_(engine_); }

 private:
  std::mt19937_64 engine_;
  std::normal_distribution<double> normal_;
};

}  // namespace agreed::test
