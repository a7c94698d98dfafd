#pragma once
// Whether a chart or a comparison notices a lasting shift of a given size within a given time, and if not,
// what would: each remedy alone, found by simulation.
//
// "Noticed within T" means in at least half of the cases: with n = T / every (whole readings), the median
// wait is at most n readings. T counts from a shift just after a reading, the worst moment. For a chart: its
// alert opens; for a comparison: agreement_drifting or agreement_lost, whichever comes first.
//
// Remedies, each with all else as it is:
//   every       more often, among the usual intervals. Where the run length comes from the allowance it gets
//               longer with the cadence, as in service. Readings stay independent, which very frequent ones
//               may not be.
//   run length  shorter, by an own in_control_run_length, or by a false_alerts_per_year that shortens all;
//               never below 100 nor, of a comparison, half its window. Not for classical charts: their
//               limits are what was chosen.
//   sd          a better repeatability: the errors times a factor, never below a twentieth.
// While searching a simulation stops as soon as it is clear on which side of one half it lies; the value
// found is confirmed with all trials and made stronger step by step until it holds (at most five times).
// Times of more than 5,000 readings are taken for 5,000.
//
// Cost: with 300 trials one to two seconds each, with 1,000 three to four, shifts that nothing helps one.
#include <memory>
#include <optional>

#include "core/base/settings.hpp"
#include "core/plan/chart_waits.hpp"
#include "core/plan/pair_waits.hpp"

namespace agreed::plan {

struct NoticeWish {
  double shift = 0;   ///< in the measurand's unit, not 0
  Duration within{};  ///< > 0
};

/// What was confirmed by simulation: the share noticed in time.
struct EveryRemedy {
  Duration every{};
  Simulated share;
  bool overspends = false;  ///< with its own run length it then leaves the others no share of the allowance
};
struct RunLengthRemedy {
  double in_control_run_length = 0;             ///< as an own setting of this chart or comparison
  double per_year = 0;                          ///< false alerts that it then has a year, of its main score
  std::optional<double> false_alerts_per_year;  ///< instead, for all; nothing where it has an own run length
  bool short_one = false;                       ///< below 1,000, which `agreed check` warns of
  bool overspends = false;  ///< as an own setting it leaves the others no share of the allowance
  Simulated share;
};
struct SdRemedy {
  double factor = 1;  ///< what its sd (of a comparison: of both analyzers) is to be multiplied by
  Simulated share;
};

/// Which to change first: what costs least. `run_length` while it stays at 1,000 or more (a setting alone);
/// else `every`; else a run length below 1,000; else `sd`.
enum class FirstRemedy { not_needed, run_length, every, sd, none };

struct Notice {
  bool met = false;
  int readings = 0;                     ///< that come in the time wished; 0: `every` alone is longer
  Simulated share;                      ///< noticed in that time
  std::optional<Simulated> median;      ///< readings; nothing: not reached within the horizon
  std::optional<Duration> median_time;  ///< median x every
  std::optional<EveryRemedy> every;
  std::optional<RunLengthRemedy> run_length;
  std::optional<SdRemedy> sd;
  std::optional<double> shift;  ///< the least one that is noticed in that time as it stands, confirmed alike
  FirstRemedy first = FirstRemedy::none;
};

/// Stepwise, so that who waits can be shown how far it is.
class NoticeSearch {
 public:
  /// Of a chart whose readings have the sd given. wish.shift stands for ChartStep::size.
  NoticeSearch(const Settings& settings, ChartIndex chart, double sd, int before, const NoticeWish& wish,
               const Trials& trials);
  /// Of a comparison.
  NoticeSearch(const Settings& settings, ComparisonIndex comparison, const PairConditions& conditions,
               int before, const NoticeWish& wish, const Trials& trials);
  ~NoticeSearch();
  NoticeSearch(NoticeSearch&&) noexcept;
  NoticeSearch& operator=(NoticeSearch&&) noexcept;

  /// One more portion of trials; false when done.
  bool step();
  [[nodiscard]] double share_done() const;
  /// Complete when step() returned false.
  [[nodiscard]] const Notice& notice() const;

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace agreed::plan
