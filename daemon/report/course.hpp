#pragma once
// What a period looked like: the monitor folded up to its beginning and then, moment by moment, through it.
// Everything is computed from what the journal holds now, with the present settings.
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "core/base/settings.hpp"
#include "core/chart/chart_view.hpp"
#include "core/pair/comparison_view.hpp"
#include "daemon/journal/journal.hpp"

namespace agreed {

/// From <= time < to.
struct ReportPeriod {
  Instant from, to;
};

/// A time through which one state held.
template <class State>
struct Spell {
  State state{};
  Instant from, to;
};

/// A pair of the period and the bias as it stood with it.
struct CoursePair {
  PairView pair;
  Verdict verdict = Verdict::gathering;       ///< with it
  std::vector<std::array<double, 3>> levels;  ///< bias, low, high at each decision level; empty: none yet
};

struct ComparisonCourse {
  std::vector<Spell<Verdict>> verdicts;  ///< oldest first, without a gap; the first from the period's start
  std::vector<CoursePair> pairs;         ///< those measured in the period, oldest first
  ComparisonView end;                    ///< as it stood at the period's end
};

struct ChartCourse {
  std::vector<Spell<ChartState>> states;
  std::int64_t readings = 0;  ///< in the period, standing and not censored
  ChartView end;
};

struct PeriodCourse {
  std::vector<ComparisonCourse> comparisons;  ///< by ComparisonIndex
  std::vector<ChartCourse> charts;            ///< by ChartIndex
};

[[nodiscard]] PeriodCourse course_of(JournalReader& reader, const std::shared_ptr<const Settings>& settings,
                                     const ReportPeriod& period);

/// How much of the time of all spells `state` took, 0 to 1.
template <class State>
[[nodiscard]] double share_of(const std::vector<Spell<State>>& spells, State state) {
  Duration of{}, all{};
  for (const Spell<State>& spell : spells) {
    const Duration took = spell.to - spell.from;
    all += took;
    if (spell.state == state) of += took;
  }
  return all > Duration{} ? static_cast<double>(of.count()) / static_cast<double>(all.count()) : 0;
}

}  // namespace agreed
