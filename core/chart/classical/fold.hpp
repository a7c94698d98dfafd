#pragma once
// One classical chart as a fold over the readings of its stretch: first the baseline, then every run judged
// against limits that no longer move.
//
// A run is the readings of one measured_at, taken as a whole. Nothing is set aside. The state is bounded:
// sums, the memories of the tests, and the means of the newest 500 runs.
//
// Limits (ISO 7870-2): individuals (runs of one, or runs whose spread was not used for sigma): centre +-
// 3 sigma and moving ranges up to 3.267 MRbar. Run means with sigma from within the runs: centre +- 3
// sigma/sqrt(n), and the range up to (d2 + 3 d3) sigma or the standard deviation up to
// (c4 + 3 sqrt(1 - c4^2)) sigma. What is looked for upwards only: less spread is no fault.
#include <optional>

#include "core/chart/chart_view.hpp"
#include "core/chart/classical/baseline.hpp"
#include "core/chart/classical/level_tests.hpp"
#include "core/chart/sliding_array.hpp"

namespace agreed::classical {

/// One run as it is shown; limits are there once the chart has them. In the measurand's unit.
struct JudgedRun : ClassicalPoint {
  int readings = 0;
  double mean = 0;
  std::optional<double> moving_range;  ///< of run means
  std::optional<double> upper, lower;
  Signals signals;
};

struct ClassicalAlarm {
  Pattern pattern = Pattern::single_reading;
  std::int64_t first = 0;  ///< number, in the stretch, of the first run of the change as estimated
  int quiet = 0;           ///< runs in a row without a signal
};

class Fold {
 public:
  /// `chart` outlives the fold.
  explicit Fold(const ChartSettings& chart);

  enum class Change { none, opened, pattern_changed, ended };
  /// Takes the next run, of one or more readings, later than any before.
  Change take(const Run& run);

  /// Begins a new stretch: a new baseline; a given centre line and sigma stay.
  void restart();

  [[nodiscard]] const std::optional<LimitBasis>& basis() const { return now_.basis; }
  /// The newest run completed the baseline.
  [[nodiscard]] bool completes_baseline() const { return completes_baseline_; }
  [[nodiscard]] bool learned() const { return now_.learned; }
  /// `learning` until there are limits and a reading.
  [[nodiscard]] ChartState state() const {
    if (now_.alarm) return ChartState::unstable;
    return now_.basis && now_.runs > 0 ? ChartState::stable : ChartState::learning;
  }
  [[nodiscard]] const std::optional<ClassicalAlarm>& alarm() const { return now_.alarm; }
  [[nodiscard]] const JudgedRun& newest() const { return now_.judged; }

  [[nodiscard]] std::int64_t runs() const { return now_.runs; }
  /// Time of the first run of the change, and the mean of the runs since (of the newest 500 at most).
  [[nodiscard]] Instant alarm_started_at() const;
  [[nodiscard]] double mean_since_alarm_started() const;

 private:
  struct Progress {
    Baseline baseline;
    bool learned = false;
    std::optional<LimitBasis> basis;
    LevelTests tests;
    std::int64_t runs = 0;
    int previous_readings = 0;
    double previous_mean = 0;
    std::optional<ClassicalAlarm> alarm;
    JudgedRun judged;
  };
  struct Mean {
    Instant at{};
    double value = 0;
  };

  [[nodiscard]] Progress beginning() const;
  [[nodiscard]] std::optional<LimitBasis> known(const Baseline& baseline) const;
  void learn(const Run& run);
  void judge(const Run& run);
  void judge_spread(const Run& run);
  void follow(const LevelTests::Result& level);
  [[nodiscard]] std::size_t alarm_position() const;

  const ChartSettings* chart_;
  Progress now_;
  bool completes_baseline_ = false;
  SlidingArray<Mean> means_;
};

}  // namespace agreed::classical
