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

// Mean readings (pairs) between false signals of normal readings, from tests/data/run_lengths.csv, which
// holds the seeds, the program and the errors: 1 % where 10,000 signals were counted, 3 % at the last
// entries.
constexpr Entry kLevel[] = {{2.6, 40.28}, {2.8, 66.2},  {3, 113.2},   {3.15, 173.2}, {3.3, 263.7},
                            {3.5, 490.1}, {3.7, 945.1}, {3.86, 1630}, {4, 2684},     {4.2, 5698},
                            {4.4, 12680}, {4.6, 30920}, {4.8, 74350}};
constexpr Entry kPrecision[] = {{2.4, 92.53},  {2.6, 154.2}, {2.8, 264.1}, {3, 468.5},
                                {3.15, 745.5}, {3.3, 1198},  {3.5, 2358},  {3.7, 4848},
                                {3.86, 8860},  {4, 14830},   {4.2, 35620}, {4.4, 82910}};
constexpr Entry kPairs[] = {{2.8, 114.6}, {3, 190.1},   {3.15, 279.4}, {3.3, 420.6},
                            {3.5, 775.5}, {3.7, 1439},  {3.86, 2497},  {4, 4127},
                            {4.2, 8735},  {4.4, 18620}, {4.6, 42420},  {4.8, 102600}};

// Of pairs held against an established line: 6,000 streams an entry (2,500 the last), signals counted over
// the pairs from the first to the signal or the 20,000th; standard error 1.3 to 1.6 %, 3 % at 4.6.
// Standard normal v and uniform w, Mersenne Twister seeds 11 and (4.6) 21;
// tests/core/pair/watch_simulation_test.cpp repeats the first entry with whole pairs.
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
