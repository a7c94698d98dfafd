#pragma once
// All that a chart remembers between events.
#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "core/base/settings.hpp"
#include "core/chart/aftermath.hpp"
#include "core/chart/chart.hpp"
#include "core/chart/classical/fold.hpp"
#include "core/chart/explanation.hpp"
#include "core/chart/level_score.hpp"
#include "core/chart/precision_score.hpp"
#include "core/chart/run_length.hpp"
#include "core/chart/sliding_array.hpp"
#include "core/chart/stretch.hpp"

namespace agreed {

constexpr std::size_t kPointsKept = 500;
constexpr std::int64_t kLeastForLimits = kLeastForLevel - 1;  ///< the fifth reading is the first tested
constexpr std::int64_t kPatternFrom = 10;  ///< readings after a signal that tell a shift from scatter
constexpr std::int64_t kLeastForRepeatability = 5;
constexpr std::int64_t kOwnRepeatabilityFrom = 11;  ///< readings, hence 10 moving ranges

/// A point as it was worked out when its reading came; what needs special functions is left to the view.
struct PointRecord {
  Instant at{};
  double value = 0;
  std::optional<double> moving_range, t, precision_score;
  std::int64_t count = 0;    ///< readings of the stretch up to here
  std::int64_t learned = 0;  ///< readings its limits rest on
  double mean = 0, sd = 0;   ///< of those
  std::optional<ChartSignal> level_signal;
  bool scatter_signal = false, set_aside = false, starts_stretch = false;
};

/// An open alert.
struct Alarm {
  EndingRule rule = EndingRule::level;
  std::string pattern;          ///< as told last
  Instant started_at{};         ///< as told last
  Prefix start;                 ///< the stretch up to the start at the signal
  std::int64_t readings = 0;    ///< since the signal
  std::optional<double> score;  ///< at the signal, of the rule that signalled
};

/// The change as it is best described now.
struct Change {
  std::string pattern;
  std::size_t position = 0;
  Instant started_at{};
  Period started_between{};
  Sums before, after;

  [[nodiscard]] double shift() const {
    return after.sum / static_cast<double>(after.n) - before.sum / static_cast<double>(before.n);
  }
};

/// What a classical chart has instead of scores; classical/in_chart.cpp works with it.
struct ClassicalPart {
  classical::Fold fold;
  std::optional<Prefix> baseline;               ///< the stretch up to its last reading, once learned
  SlidingArray<classical::JudgedRun> judged{};  ///< as `points`
};

struct Chart::State {
  State(const Settings& all, ChartIndex at);

  const Settings* settings;
  ChartIndex index;
  ChangeLimit level, precision;
  Stretch stretch;
  std::optional<Alarm> alarm;
  std::optional<std::size_t> lot;  ///< of the newest reading
  bool stretch_begins = false;     ///< the next reading is the first after an intervention or of a new lot
  std::int64_t set_aside = 0;      ///< readings of this stretch
  Repeatability before_stretch;    ///< stands in while this stretch knows too little
  std::optional<Instant> newest;
  std::int64_t points_seen = 0;
  SlidingArray<PointRecord> points;  ///< of the newest readings
  SlidingArray<Repeatability> history;
  bool history_cut = false;
  std::vector<StretchMark> marks;
  std::vector<float> scratch;
  std::optional<ClassicalPart> classical;

  [[nodiscard]] const ChartSettings& chart() const { return settings->of(index); }
  [[nodiscard]] const Measurand& measurand() const { return settings->of(chart().measurand); }
  [[nodiscard]] std::size_t lot_at(Instant at) const;
  [[nodiscard]] const Lot& present_lot() const { return chart().lots.at(lot.value_or(0)); }

  /// The stretch as far as it is learned from: all of it, or up to the start of what an open alert suspects;
  /// on a classical chart the baseline.
  [[nodiscard]] Prefix learned() const {
    if (classical && classical->baseline) return *classical->baseline;
    return alarm ? alarm->start : stretch.last();
  }
  [[nodiscard]] double mean_of(const Sums& sums) const;
  /// Sample sd, not below what the resolution allows; needs 2 readings.
  [[nodiscard]] double sd_of(const Sums& sums) const;
  [[nodiscard]] Repeatability repeatability() const;

  /// Of an open alert: which pattern, since when.
  [[nodiscard]] Change describe() const;
  /// The alert's finding as of now.
  [[nodiscard]] Finding finding(const Change& change) const;
  [[nodiscard]] Details details(const Change& change) const;
  [[nodiscard]] std::optional<double> score_of(EndingRule rule) const;
  [[nodiscard]] bool matters(const Change& change) const;
  [[nodiscard]] Subject subject() const;
  [[nodiscard]] Finding ceased(Instant at, const char* reason, std::int64_t set_aside_now) const;

  // Of a classical chart.
  void judge_by_limits(Instant at, std::span<const double> run, std::vector<Finding>& findings);
  void restart_classical(Instant at, std::vector<Finding>& findings);
  [[nodiscard]] Finding classical_finding() const;
  [[nodiscard]] bool matters_by_limits() const;
  void show_classical(ChartView& view) const;

  void follow_lot(Instant at, std::vector<Finding>& findings);
  PointRecord& take(Instant at, double value);
  void test(PointRecord& point, std::vector<Finding>& findings);
  void follow_up(const PointRecord& point, std::vector<Finding>& findings);
  void open(EndingRule rule, std::size_t position, const char* pattern, std::vector<Finding>& findings);
  void close(const Aftermath& aftermath, Instant at, std::vector<Finding>& findings);
  void begin_stretch(Instant at, const std::string& what, std::vector<Finding>& findings);
  void accept_level(Instant at, std::vector<Finding>& findings);
  void remember(const PointRecord& point);
  void remember_repeatability(Instant at);
  void mark(Instant at, const std::string& what);
  [[nodiscard]] ChartPoint shown(const PointRecord& record) const;
  [[nodiscard]] ChangeView change_view() const;
  [[nodiscard]] PrecisionView precision_view() const;
  [[nodiscard]] BaselineView baseline_view() const;
  [[nodiscard]] std::optional<ReferenceView> reference_view() const;
  [[nodiscard]] std::vector<std::string> warnings(const std::optional<double>& correlation) const;
  [[nodiscard]] PointRecord* point(std::int64_t number);
  [[nodiscard]] Stretch new_stretch() const;
};

}  // namespace agreed
