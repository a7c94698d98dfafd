// Simulations with fixed seeds: what the intervals and the rules promise, within three Monte Carlo standard
// errors.
#include "core/base/distributions.hpp"
#include "core/pair/drift_alarm.hpp"
#include "core/pair/jackknife.hpp"
#include "tests/core/pair/harrow_mill.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
struct Coverage {
  double analytic = 0, jackknife = 0;
};

// Share of 95 % intervals of the bias at a level that hold the true one.
Coverage coverage(const Plant& plant, double delta, double level, std::size_t n, int runs,
                  std::uint64_t seed) {
  std::mt19937_64 random(seed);
  const double truth = plant.intercept + (plant.slope - 1) * level;
  const double t = t_quantile_of_tail(0.025, static_cast<double>(n) - 2);
  Coverage held;
  for (int i = 0; i < runs; ++i) {
    const auto points = draw(plant, n, random);
    const Moments m(points);
    const DemingLine line = deming_line(m, delta);
    const LineCovariance analytic = analytic_covariance(m, line, residual_variance(points, m, line), 0);
    const double miss = std::abs(line.difference_at(level) - truth), offset = level - line.mean_x;
    if (miss <= t * std::sqrt(analytic.difference_at(offset))) held.analytic += 1.0 / runs;
    const auto jackknife = jackknife_covariance(points, m, line);
    if (miss <= t * std::sqrt(jackknife->difference_at(offset))) held.jackknife += 1.0 / runs;
  }
  return held;
}
}  // namespace

TEST_CASE("95 % intervals cover 95 %, analytic and jackknife, with constant errors") {
  constexpr int runs = 20000;
  const double three_errors = 3 * std::sqrt(0.95 * 0.05 / runs);
  // Stated: analytic 94.7 to 95.6 %, jackknife 94.1 to 95.4 %; outside these only by Monte Carlo error.
  for (const double level : {9.5, 12.0, 14.5}) {
    const Coverage held = coverage({9, 15, 0.1, 1.02, 0.3, 0.2}, 0.04 / 0.09, level, 40, runs, 101);
    MESSAGE("level " << level << ": analytic " << held.analytic << ", jackknife " << held.jackknife);
    CHECK(held.analytic > 0.947 - three_errors);
    CHECK(held.analytic < 0.956 + three_errors);
    CHECK(held.jackknife > 0.941 - three_errors);
    CHECK(held.jackknife < 0.954 + three_errors);
  }
}

TEST_CASE("an estimated lambda on a narrow range needs its own uncertainty in the interval") {
  // Slope, 20 degrees of freedom for each repeatability, errors a third of the range.
  constexpr int runs = 10000;
  std::mt19937_64 random(102);
  std::chi_squared_distribution<double> chi2(20);
  const Plant plant{11, 13, 0, 1, 0.35, 0.35};
  const double t = t_quantile_of_tail(0.025, 98);
  double with = 0, without = 0;
  for (int i = 0; i < runs; ++i) {
    const auto points = draw(plant, 100, random);
    const Moments m(points);
    const DemingLine line = deming_line(m, chi2(random) / chi2(random));
    const double s2 = residual_variance(points, m, line);
    const double miss = std::abs(line.slope - 1);
    if (miss <= t * std::sqrt(analytic_covariance(m, line, s2, 2 * trigamma(10)).slope)) with += 1.0 / runs;
    if (miss <= t * std::sqrt(analytic_covariance(m, line, s2, 0).slope)) without += 1.0 / runs;
  }
  MESSAGE("with " << with << ", without " << without);
  CHECK(without < 0.92);
  CHECK(with > 0.935);
  CHECK(with < 0.965);
}

TEST_CASE("false alarms of a comparison in control keep to their run lengths") {
  // Warnings at h = 3.5 (run length 795) and outliers at 1 in 400, 60 monitors of 600 pairs each.
  Settings settings = harrow_mill();
  settings.comparisons[0].warning_run_length = 795;
  settings.comparisons[0].outlier_run_length = 400;
  settings.comparisons[0].window_pairs = 100;
  int warnings = 0, outliers = 0, lost = 0;
  for (std::uint64_t seed = 0; seed < 60; ++seed) {
    Mill mill(1000 + seed, settings);
    mill.run(600);
    for (const Finding& f : mill.findings) {
      if (f.kind == AlertKind::agreement_drifting && f.holds && f.severity == Severity::warning) ++warnings;
      if (f.kind == AlertKind::pair_outlier) ++outliers;
      if (f.kind == AlertKind::agreement_lost) ++lost;
    }
  }
  MESSAGE("warnings " << warnings << ", outliers " << outliers << ", lost " << lost);
  // 36,000 pairs: 45 warnings less those that an open one covers; a fifth of reserve for that and the start.
  CHECK(warnings > 20);
  CHECK(warnings < 45 + 3 * std::sqrt(45.0));
  // 90 outliers; a few are admitted since their like came within two pairs.
  CHECK(outliers > 90 - 3 * std::sqrt(90.0) - 5);
  CHECK(outliers < 90 + 3 * std::sqrt(90.0));
  CHECK(lost == 0);
}

TEST_CASE("a step of one pair sd is told in about the promised number of pairs") {
  // 3-statistics: median 23 pairs at h for a run length of 2,670 after 60 pairs, asked at three lambdas.
  Settings settings = harrow_mill();
  settings.comparisons[0].warning_run_length = 2670;
  std::vector<int> delays;
  for (std::uint64_t seed = 0; seed < 200; ++seed) {
    Mill mill(5000 + seed, settings);
    mill.run(60);
    mill.findings.clear();
    int delay = 0;
    while (mill.of(AlertKind::agreement_drifting).empty() && delay < 300) {
      mill.run(1, 0.02 * std::sqrt(2.0));
      ++delay;
    }
    delays.push_back(delay);
  }
  std::nth_element(delays.begin(), delays.begin() + 100, delays.end());
  MESSAGE("median delay " << delays[100]);
  CHECK(delays[100] >= 17);
  CHECK(delays[100] <= 27);
}

TEST_CASE("a bias that is just allowable is called a lost agreement in few comparisons") {
  // Stated for a bias of exactly A = 1 pair sd, window 200, two levels at the 10th and 90th percentile: 6 %
  // of comparisons within 1,000 pairs; for 0.8 A: 0.5 %.
  Settings settings = harrow_mill();
  const double allowable = 0.02 * std::sqrt(2.0);
  settings.measurands[0].decision_levels = {9.6, 14.4};
  settings.measurands[0].allowable = AllowableDifference{allowable, std::nullopt};
  constexpr int monitors = 150;
  for (const auto& [part, stated] : {std::pair{1.0, 0.06}, std::pair{0.8, 0.005}}) {
    int lost = 0;
    for (std::uint64_t seed = 0; seed < monitors; ++seed) {
      Mill mill(7000 + seed, settings);
      mill.run(1000, part * allowable);
      if (!mill.of(AlertKind::agreement_lost).empty()) ++lost;
    }
    MESSAGE("bias " << part << " A: lost in " << lost << " of " << monitors);
    CHECK(lost <= monitors * stated + 3 * std::sqrt(monitors * stated));
  }
}
