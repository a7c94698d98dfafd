#include "core/chart/run_length.hpp"

#include <algorithm>
#include <cmath>
#include <span>
#include <stdexcept>
#include <string>

namespace agreed {
namespace {
struct Entry {
  double h, run_length;
};

// Mean readings (pairs) between false signals of normal readings, simulated with 400,000 (level), 60,000
// (precision) and 150,000 (pairs) streams; tests/core/chart/chart_slow_test.cpp repeats entries.
constexpr Entry kLevel[] = {{3.3, 258},  {3.5, 483},   {3.7, 908},   {3.86, 1613}, {4.0, 2663},
                            {4.2, 5708}, {4.4, 12840}, {4.6, 30600}, {4.8, 75100}};
constexpr Entry kPrecision[] = {{3.0, 479},   {3.3, 1203},  {3.5, 2363},  {3.7, 4902},
                                {3.86, 9130}, {4.0, 15370}, {4.2, 35200}, {4.4, 84700}};
constexpr Entry kPairs[] = {{3.5, 795},   {3.86, 2670}, {4.0, 4440},  {4.2, 9490},
                            {4.4, 21300}, {4.6, 50500}, {4.8, 129000}};

// Of pairs held against an established line: 6,000 streams an entry (2,500 the last), signals counted over
// the pairs from the first to the signal or the 20,000th; standard error 1.3 to 1.6 %, 3 % at 4.6.
constexpr Entry kPairsEstablishedLine[] = {{3.5, 776},  {3.86, 2483}, {4.0, 3976},
                                           {4.2, 8195}, {4.4, 18465}, {4.6, 41540}};

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

// Below this the fitted law no longer rises with h; no run length shorter than its own is of use.
constexpr double kLeastLimit = 1.1;
constexpr double kLargestLimit = 37;
}  // namespace

double run_length_for(Score score, double h) {
  if (!std::isfinite(h)) throw std::domain_error("h: expected a finite limit");
  return std::exp(law_of(score).at(std::clamp(h, kLeastLimit, kLargestLimit)));
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
