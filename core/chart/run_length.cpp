#include "core/chart/run_length.hpp"

#include <algorithm>
#include <cmath>
#include <iterator>
#include <span>
#include <stdexcept>
#include <string>
#include <utility>

namespace agreed {
namespace {
struct Entry {
  double h, run_length;
};

// Mean readings (pairs) between false signals of normal readings, from tests/data/run_lengths.csv, which
// holds the seeds, the program and the errors: at least 10,000 signals an entry, so 1 % at most.
constexpr Entry kLevel[] = {{2.6, 40.2},  {2.8, 65.91}, {3, 112.9},   {3.15, 171.9}, {3.3, 264.4},
                            {3.5, 491.6}, {3.7, 938.6}, {3.86, 1617}, {4, 2666},     {4.2, 5700},
                            {4.4, 12660}, {4.6, 29910}, {4.8, 72810}};
constexpr Entry kPrecision[] = {{2.4, 93.78},  {2.6, 155.3}, {2.8, 262.2}, {3, 468.3},
                                {3.15, 745.2}, {3.3, 1200},  {3.5, 2362},  {3.7, 4853},
                                {3.86, 8888},  {4, 15220},   {4.2, 35580}, {4.4, 82320}};
constexpr Entry kPairs[] = {{2.8, 113.3}, {3, 188},     {3.15, 278.8}, {3.3, 422.2},
                            {3.5, 772.1}, {3.7, 1442},  {3.86, 2492},  {4, 4071},
                            {4.2, 8447},  {4.4, 18670}, {4.6, 43370},  {4.8, 105400}};
// Of pairs held against an established line.
constexpr Entry kPairsEstablishedLine[] = {{3.5, 754.2}, {3.86, 2439}, {4, 3988},
                                           {4.2, 8426},  {4.4, 19000}, {4.6, 43330}};

// ln(run length) = h^2/2 - slope ln h + constant, fitted to the tables; it rises with h from sqrt(slope) on.
struct Law {
  std::span<const Entry> table;
  double slope, constant;

  [[nodiscard]] double fitted(double h) const { return h * h / 2 - slope * std::log(h) + constant; }

  /// ln(run length); beyond the table the fitted law, moved so that it goes on from the table's end.
  [[nodiscard]] double at(double h) const {
    const Entry &first = table.front(), &last = table.back();
    if (h < first.h) return std::log(first.run_length) + fitted(h) - fitted(first.h);
    if (h > last.h) return std::log(last.run_length) + fitted(h) - fitted(last.h);
    const auto upper = std::find_if(table.begin() + 1, table.end() - 1, [h](auto& e) { return h <= e.h; });
    const Entry &low = *(upper - 1), &high = *upper;
    const double share = (h - low.h) / (high.h - low.h);
    return std::log(low.run_length) + share * (std::log(high.run_length) - std::log(low.run_length));
  }
};

Law law_of(Score score) {
  switch (score) {
    case Score::level:
      return {kLevel, 1.10, 1.44};
    case Score::precision:
      return {kPrecision, 0, 1.65};
    case Score::pairs:
      return {kPairs, 1.11, 1.94};
    case Score::pairs_established_line:
      return {kPairsEstablishedLine, 1.11, 1.80};
  }
  throw std::domain_error("score: not one of those known");
}

// How far the limit of the level score lies from the later one at the first readings of a stretch, by that
// later limit: tests/data/first_limits.csv, smoothed over neighbouring readings.
constexpr double kLaterLimits[] = {2.6, 3.0, 3.5, 4.0, 4.4, 4.8};
struct FirstLimits {
  std::int64_t n;
  double beyond[std::size(kLaterLimits)];
};
constexpr FirstLimits kFirstLimits[] = {{5, {-0.099, -0.153, -0.215, -0.258, -0.285, -0.293}},
                                        {6, {-0.050, -0.094, -0.145, -0.188, -0.213, -0.231}},
                                        {7, {-0.005, -0.040, -0.092, -0.130, -0.154, -0.146}},
                                        {8, {0.021, -0.004, -0.052, -0.095, -0.121, -0.120}},
                                        {9, {0.033, 0.017, -0.024, -0.066, -0.098, -0.097}},
                                        {10, {0.039, 0.028, -0.008, -0.048, -0.068, -0.080}},
                                        {12, {0.043, 0.042, 0.016, -0.019, -0.044, -0.057}},
                                        {15, {0.040, 0.045, 0.030, 0.006, -0.015, -0.024}},
                                        {20, {0.029, 0.041, 0.033, 0.016, 0.000, 0.003}},
                                        {29, {0.013, 0.029, 0.028, 0.021, 0.009, 0.023}}};

// Position of `value` among ascending knots: the one before it and the share of the way to the next.
template <class Knots, class Of>
std::pair<std::size_t, double> between(const Knots& knots, Of of, double value) {
  std::size_t i = 0;
  while (i + 2 < std::size(knots) && value > of(knots[i + 1])) ++i;
  const double low = of(knots[i]), high = of(knots[i + 1]);
  return {i, std::clamp((value - low) / (high - low), 0.0, 1.0)};
}

// Below this the fitted law no longer rises with h; no run length shorter than its own is of use.
constexpr double kLeastLimit = 1.1;
constexpr double kLargestLimit = 37;
}  // namespace

double run_length_for(Score score, double h) {
  if (!std::isfinite(h)) throw std::domain_error("h: expected a finite limit");
  return std::exp(law_of(score).at(std::clamp(h, kLeastLimit, kLargestLimit)));
}

double level_limit_at(std::int64_t n, double h) {
  if (n < kFirstLimits[0].n || n > std::rbegin(kFirstLimits)->n) return h;
  const auto [row, down] = between(
      kFirstLimits, [](const FirstLimits& e) { return static_cast<double>(e.n); }, static_cast<double>(n));
  const auto [column, right] = between(
      kLaterLimits, [](double e) { return e; }, h);
  const auto beyond = [column = column, right = right](const FirstLimits& e) {
    return std::lerp(e.beyond[column], e.beyond[column + 1], right);
  };
  return h + std::lerp(beyond(kFirstLimits[row]), beyond(kFirstLimits[row + 1]), down);
}

ChangeLimit limit_for(Score score, double run_length) {
  if (!(std::isfinite(run_length) && run_length > 1))
    throw std::domain_error("run_length: expected readings, above 1, got " + std::to_string(run_length));
  const Law law = law_of(score);
  const double wanted = std::log(run_length);
  // At a table's own entry bisection would end a rounding error beside it.
  for (const Entry& entry : law.table)
    if (std::abs(run_length - entry.run_length) < 1e-9 * run_length) return {entry.h, false};
  double low = kLeastLimit, high = kLargestLimit;
  for (int i = 0; i < 100; ++i) {
    const double middle = (low + high) / 2;
    (law.at(middle) < wanted ? low : high) = middle;
  }
  const double h = (low + high) / 2;
  return {h, h < law.table.front().h || h > law.table.back().h};
}

}  // namespace agreed
