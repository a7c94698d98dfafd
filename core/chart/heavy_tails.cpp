#include "core/chart/heavy_tails.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "core/chart/run_length.hpp"

namespace agreed {
namespace {
constexpr double kNormal99 = 2.3263478740408408;

// Run lengths of the level score with t errors, simulated for the design.
constexpr std::array<double, 3> kLimits = {3.86, 4.08, 4.40};
constexpr std::array<double, 3> kOfNormal = {1613, 3650, 12840};
struct Column {
  double degrees;
  std::array<double, 3> run_lengths;
};
constexpr std::array<Column, 5> kColumns = {{{5, {205, 277, 405}},
                                             {8, {387, 586, 1023}},
                                             {12, {642, 1118, 2538}},
                                             {20, {878, 1635, 4433}},
                                             {40, {1161, 2383, 6832}}}};

const Column& nearest(double degrees) {
  return *std::min_element(kColumns.begin(), kColumns.end(), [degrees](const Column& a, const Column& b) {
    return std::abs(std::log(degrees / a.degrees)) < std::abs(std::log(degrees / b.degrees));
  });
}
}  // namespace

double kurtosis_point(std::int64_t count) {
  const auto n = static_cast<double>(count);
  const double mean = 3 * (n - 1) / (n + 1);
  const double variance = 24 * n * (n - 2) * (n - 3) / ((n + 1) * (n + 1) * (n + 3) * (n + 5));
  const double skewness = 6 * (n * n - 5 * n + 2) / ((n + 7) * (n + 9)) *
                          std::sqrt(6 * (n + 3) * (n + 5) / (n * (n - 2) * (n - 3)));
  const double a = 6 + 8 / skewness * (2 / skewness + std::sqrt(1 + 4 / (skewness * skewness)));
  // z = ((1 - 2/(9a)) - cbrt((1 - 2/a) / (1 + x sqrt(2/(a-4))))) / sqrt(2/(9a)), solved for x.
  const double root = 1 - 2 / (9 * a) - kNormal99 * std::sqrt(2 / (9 * a));
  const double x = ((1 - 2 / a) / (root * root * root) - 1) / std::sqrt(2 / (a - 4));
  return mean + x * std::sqrt(variance) - 3;
}

std::optional<HeavyTails> heavy_tails(const Stretch& stretch, std::int64_t learned) {
  const std::int64_t n = learned - stretch.block();
  if (n < kLeastForTails) return {};
  const double* deviation = stretch.deviation();
  const auto last = static_cast<std::size_t>(n);
  double mean = 0;
  for (std::size_t j = 1; j <= last; ++j) mean += (deviation[j] - mean) / static_cast<double>(j);
  double second = 0;
  for (std::size_t j = 1; j <= last; ++j) second += (deviation[j] - mean) * (deviation[j] - mean);
  second /= static_cast<double>(n);
  if (!(second > 0)) return {};
  // Of readings in units of their sd: fourth powers of large ones would overflow.
  const double sd = std::sqrt(second);
  double fourth = 0;
  for (std::size_t j = 1; j <= last; ++j) {
    const double u = (deviation[j] - mean) / sd;
    fourth += u * u * u * u;
  }
  HeavyTails tails;
  tails.readings = n;
  tails.excess = fourth / static_cast<double>(n) - 3;
  tails.from = kurtosis_point(n);
  if (!(tails.excess > tails.from)) return {};
  tails.degrees = 4 + 6 / tails.excess;
  return tails;
}

double run_length_with_tails(double degrees, double h) {
  const Column& column = nearest(degrees);
  const auto less = [&](std::size_t i) { return std::log(column.run_lengths[i] / kOfNormal[i]); };
  if (h <= kLimits.front()) return run_length_for(Score::level, h) * std::exp(less(0));
  if (h >= kLimits.back()) return run_length_for(Score::level, h) * std::exp(less(2));
  const std::size_t i = h <= kLimits[1] ? 0 : 1;
  const double share = (h - kLimits[i]) / (kLimits[i + 1] - kLimits[i]);
  return std::exp((1 - share) * std::log(column.run_lengths[i]) +
                  share * std::log(column.run_lengths[i + 1]));
}

}  // namespace agreed
