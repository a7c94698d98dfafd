// Microseconds a new pair costs in a rolling window of W, and a new check reading on a chart: everything that
// is concluded from it included (fit, both kinds of standard error, verdicts, pair chart, outlier test; both
// scores).
#include <chrono>
#include <cstdio>
#include <random>
#include <string>
#include <vector>

#include "core/chart/chart.hpp"
#include "core/pair/comparison.hpp"
#include "core/pair/error_model.hpp"
#include "core/pair/error_ratio.hpp"

using namespace agreed;

namespace {

Settings mill(int window, FitMethod fit, ErrorGrowth growth) {
  Settings settings;
  settings.analyzers = {{"line1", "line1"}, {"line2", "line2"}};
  settings.measurands = {{"protein", "Protein", "g/100 g", 3, {10.5, 13.0}, AllowableDifference{0.2, 1.5}}};
  settings.standards = {{"wheat-low", "wheat-low"}};
  ChartSettings chart;
  chart.level_run_length = chart.precision_run_length = 3650;
  chart.lots = {{"2026-A", {}, {}}};
  settings.charts = {chart};
  ComparisonSettings comparison;
  comparison.id = "protein";
  comparison.y = {1};
  comparison.window_pairs = window;
  comparison.fit = fit;
  comparison.error_growth = growth;
  comparison.warning_run_length = 14600;
  comparison.outlier_run_length = comparison.scatter_run_length = 29200;
  settings.comparisons = {comparison};
  return settings;
}

double seconds_since(std::chrono::steady_clock::time_point begun) {
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - begun).count();
}

ErrorModel model_of(ErrorGrowth growth, double sd) {
  const std::vector<Repeatability> standards = {{{}, sd * sd, 40, 10.6}, {{}, 1.4 * sd * sd, 40, 13.4}};
  return fit_error_model(growth, standards);
}

void time_pairs(int window, const char* name, FitMethod fit, ErrorGrowth growth) {
  const Settings settings = mill(window, fit, growth);
  Comparison comparison(settings, {0});
  const ErrorRatio ratio = growth == ErrorGrowth::constant
                               ? ratio_of({0.02 * 0.02, 40}, {0.022 * 0.022, 40})
                               : ratio_of(model_of(growth, 0.02), model_of(growth, 0.022), 12);
  std::mt19937 random(1);
  std::normal_distribution<double> error(0, 0.02);
  std::uniform_real_distribution<double> truth(10.0, 13.6);
  std::vector<Pair> pairs;
  for (int i = 0; i < 40'000; ++i) {
    const double t = truth(random);
    pairs.push_back(
        {"S-" + std::to_string(i), Instant{std::chrono::hours(2 * i)}, t + error(random), t + error(random)});
  }
  std::vector<Finding> findings;
  std::size_t next = 0;
  for (; next < 2'000; ++next) comparison.add(pairs[next], ratio, findings);
  const auto begun = std::chrono::steady_clock::now();
  for (; next < pairs.size(); ++next) comparison.add(pairs[next], ratio, findings);
  std::printf("pair%s W=%d: %.2f us\n", name, window, seconds_since(begun) / 38'000 * 1e6);
}

void time_checks() {
  const Settings settings = mill(200, FitMethod::deming, ErrorGrowth::constant);
  Chart chart(settings, {0});
  std::mt19937 random(2);
  std::normal_distribution<double> error(0, 0.02);
  std::vector<Finding> findings;
  CheckReading reading;
  const auto add = [&](int count) {
    for (int i = 0; i < count; ++i) {
      reading.measured_at += std::chrono::hours(8);
      reading.value = 10.62 + error(random);
      chart.add(reading, findings);
    }
  };
  add(2'000);
  const auto begun = std::chrono::steady_clock::now();
  add(100'000);
  std::printf("check reading, both scores: %.2f us\n", seconds_since(begun) / 100'000 * 1e6);
}

}  // namespace

int main() {
  for (const int window : {40, 200, 1000}) {
    time_pairs(window, "", FitMethod::deming, ErrorGrowth::constant);
    time_pairs(window, ", weighted Deming", FitMethod::weighted_deming, ErrorGrowth::proportional);
    time_pairs(window, ", York", FitMethod::deming, ErrorGrowth::mixed);
  }
  time_checks();
}
