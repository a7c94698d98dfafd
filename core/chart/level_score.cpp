#include "core/chart/level_score.hpp"

#include <cmath>
#include <limits>

#include "core/base/distributions.hpp"
#include "core/chart/serial_correlation.hpp"

namespace agreed {
namespace {
// Sums of squares closer than this part of them are equal but for rounding: the earlier split wins.
constexpr double kTie = 1e-12;

// Abramowitz and Stegun (1964) 26.7.5. The first term left out is below 1e-9 of t from 300 degrees of
// freedom on, for x up to 6.
double t_quantile_expanded(double x, double df) {
  const double x2 = x * x;
  const double g1 = x * (x2 + 1) / 4;
  const double g2 = x * ((5 * x2 + 16) * x2 + 3) / 96;
  const double g3 = x * (((3 * x2 + 19) * x2 + 17) * x2 - 15) / 384;
  const double g4 = x * ((((79 * x2 + 776) * x2 + 1482) * x2 - 1920) * x2 - 945) / 92160;
  return x + (g1 + (g2 + (g3 + g4 / df) / df) / df) / df;
}

double residual_floor(const Stretch& stretch) {
  const auto counted = static_cast<double>(stretch.counted());
  return std::max((counted - 2) * stretch.least_variance(), std::numeric_limits<double>::min());
}

// m times the variance of a mean of m readings whose lag-1 correlation is r, over that of one reading.
double inflation(double r, double m) {
  return (1 + r) / (1 - r) - 2 * r * (1 - std::pow(r, m)) / (m * (1 - r) * (1 - r));
}
}  // namespace

LevelSplit best_level_split(const Stretch& stretch) {
  const std::size_t held = stretch.held();
  const double* sum = stretch.sum();
  const double* inverse_before = stretch.inverse_before();
  const double* inverse_after = stretch.inverse_after();
  const auto n = static_cast<double>(stretch.count());
  const double mean = sum[held] / n;

  std::size_t best = first_level_split(stretch);
  double largest = -1, bar = -1;
  auto k = static_cast<double>(stretch.before(best));
  for (std::size_t j = best; j < held; ++j, k += 1) {
    const double excess = sum[j] - k * mean;  // = k (mean before - mean of all)
    const double between = excess * excess * (inverse_before[j] + inverse_after[j]);
    if (between > bar) {
      largest = between;
      bar = between * (1 + kTie);
      best = j;
    }
  }

  LevelSplit split{best, stretch.before(best),   stretch.count(), stretch.counted(),
                   0,    residual_floor(stretch)};
  const double carried = stretch.carried().squares;
  if (!stretch.has_spread() && !(carried > 0)) return split;
  split.residual = std::max(split.residual, stretch.last().sums.about_mean() - largest + carried);
  const double t = std::sqrt(static_cast<double>(split.counted - 2) * largest / split.residual);
  split.t = sum[best] - static_cast<double>(split.before) * mean < 0 ? t : -t;
  return split;
}

double level_score(double t, std::int64_t counted) {
  return normal_score_of_t(t, static_cast<double>(counted - 2));
}

bool level_score_exceeds(double t, std::int64_t counted, double h) {
  return std::abs(t) > h && std::abs(level_score(t, counted)) > h;
}

bool holds_with_serial_correlation(const Stretch& stretch, const LevelSplit& best, double h) {
  const double r = residual_correlation(stretch, best.position);
  const std::size_t held = stretch.held();
  const double* sum = stretch.sum();
  const auto n = static_cast<double>(stretch.count());
  const auto counted = static_cast<double>(stretch.counted());
  const double total = stretch.last().sums.about_mean() + stretch.carried().squares;
  const double floor = residual_floor(stretch);
  double largest = 0;
  for (std::size_t j = first_level_split(stretch); j < held; ++j) {
    const auto before = static_cast<double>(stretch.before(j));
    const double after = n - before;
    const double difference = (sum[held] - sum[j]) / after - sum[j] / before;
    const double between =
        difference * difference / (inflation(r, before) / before + inflation(r, after) / after);
    largest = std::max(largest, (counted - 2) * between / std::max(floor, total - between));
  }
  return level_score_exceeds(std::sqrt(largest), stretch.counted(), h);
}

double prediction_factor(std::int64_t n, std::int64_t degrees, double h) {
  constexpr double kExpandedFrom = 300;
  const auto df = static_cast<double>(degrees);
  const double t = df < kExpandedFrom ? t_of_normal_score(h, df) : t_quantile_expanded(h, df);
  return t * std::sqrt(1 + 1 / static_cast<double>(n));
}

}  // namespace agreed
