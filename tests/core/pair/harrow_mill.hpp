#pragma once
// Harrow Mill's comparison of protein on line1 and line2, for the tests of whole comparisons.
#include <chrono>
#include <random>
#include <string>
#include <utility>
#include <vector>

#include "core/pair/comparison.hpp"
#include "tests/core/pair/support.hpp"

namespace agreed::test {

inline Settings harrow_mill() {
  Settings settings;
  settings.site = "Harrow Mill";
  settings.analyzers = {{"line1", "line1"}, {"line2", "line2"}};
  Measurand protein;
  protein.id = protein.title = "protein";
  protein.unit = "g/100 g";
  protein.decision_levels = {10.5, 13.0};
  protein.allowable = AllowableDifference{0.1, std::nullopt};
  settings.measurands = {protein};
  ComparisonSettings comparison;
  comparison.id = comparison.title = "protein";
  comparison.measurand = {0};
  comparison.x = {0};
  comparison.y = {1};
  comparison.error_ratio.source = ErrorSource::given_sds;
  comparison.error_ratio.sd_x = comparison.error_ratio.sd_y = 0.02;
  comparison.warning_run_length = 15000;
  comparison.outlier_run_length = 30000;
  comparison.scatter_run_length = 30000;
  settings.comparisons = {comparison};
  return settings;
}

inline ErrorRatio equal_errors(double sd = 0.02) {
  ErrorRatio ratio;
  ratio.known = ratio.variances_known = true;
  ratio.x.variance = ratio.y.variance = sd * sd;
  return ratio;
}

/// A comparison that is fed one pair every two hours.
struct Mill {
  Settings settings;
  Comparison comparison;
  std::mt19937_64 random;
  Plant plant;
  ErrorRatio ratio = equal_errors();
  std::vector<Finding> findings;
  int pairs = 0;
  Instant now{std::chrono::hours(24 * 365 * 50)};

  explicit Mill(std::uint64_t seed, Settings given = harrow_mill())
      : settings(std::move(given)), comparison(settings, ComparisonIndex{0}), random(seed) {}
  Mill(const Mill&) = delete;
  Mill& operator=(const Mill&) = delete;

  void add(Point point) {
    now += std::chrono::hours(2);
    Pair pair{"S-" + std::to_string(++pairs), now, point.x, point.y};
    comparison.add(pair, ratio, findings);
  }
  void run(int n, double shift = 0) {
    for (int i = 0; i < n; ++i) {
      Point p = plant(random);
      p.y += shift;
      add(p);
    }
  }
  void intervene() {
    now += std::chrono::minutes(1);
    comparison.add({now, AnalyzerIndex{1}, {}, {}, InterventionKind::recalibrated, ""}, findings);
  }
  std::vector<Finding> of(AlertKind kind) const {
    std::vector<Finding> some;
    for (const Finding& f : findings)
      if (f.kind == kind) some.push_back(f);
    return some;
  }
};

inline double number_in(const Finding& finding, const std::string& name) {
  for (const auto& [key, value] : finding.details)
    if (key == name) return std::get<double>(value);
  FAIL("no detail " << name);
  return 0;
}

inline std::string text_in(const Finding& finding, const std::string& name) {
  for (const auto& [key, value] : finding.details)
    if (key == name) return std::get<std::string>(value);
  FAIL("no detail " << name);
  return {};
}

}  // namespace agreed::test
