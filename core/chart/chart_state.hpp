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
#include "core/chart/mean_level.hpp"
#include "core/chart/precision_score.hpp"
#include "core/chart/reference.hpp"
#include "core/chart/run_length.hpp"
#include "core/chart/sliding_array.hpp"
#include "core/chart/stretch.hpp"

namespace agreed {

constexpr std::size_t kPointsKept = 500;
constexpr std::int64_t kLeastForLimits = kLeastForLevel - 1;  ///< the fifth reading is the first tested
constexpr std::int64_t kPatternFrom = 10;  ///< readings after a signal that tell a shift from scatter
constexpr std::int64_t kLeastForRepeatability = 5;
constexpr std::int64_t kLeastWithin = 4;     ///< degrees of freedom within runs that count for repeatability
constexpr std::int64_t kLeastForEffect = 5;  ///< readings of a stretch whose level is compared with another
constexpr std::int64_t kOwnRepeatabilityFrom = 11;  ///< readings, hence 10 moving ranges

/// A point as it was worked out when its reading came; what needs special functions is left to the view.
struct PointRecord {
  Instant at{};
  double value = 0;
  std::optional<double> moving_range, t, precision_score;
  std::int64_t counted = 0;  ///< as Stretch::counted, up to here
  std::int64_t learned = 0;  ///< readings its limits rest on
  std::int64_t degrees = 0;  ///< of the sd; 0: not known well enough for limits
  double mean = 0, sd = 0;   ///< of those
  int replicates = 1;
  double within_squares = 0;
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
  double limit = 0;             ///< likewise
};

/// The change as it is best described now.
struct Change {
  std::string pattern;
  std::size_t position = 0;
  Instant started_at{};
  Period started_between{};
  Sums before, after;

  /// Nothing where the scatter of a new lot is told from its first reading on.
  [[nodiscard]] std::optional<double> shift() const {
    if (before.n == 0 || after.n == 0) return {};
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
  std::int64_t precision_degrees = 1;  ///< within a run, that the limit of precision is for
  Stretch stretch;
  std::optional<Alarm> alarm;
  std::optional<std::size_t> lot;  ///< of the newest reading
  bool stretch_begins = false;     ///< the next reading is the first after an intervention or of a new lot
  std::int64_t set_aside = 0;      ///< readings of this stretch
  Repeatability before_stretch;    ///< stands in while this stretch knows too little
  bool biased = false;             ///< against the reference value, as told
  std::optional<MeanLevel> first_level;   ///< of the first stretch of this lot
  std::optional<MeanLevel> level_before;  ///< just before the newest intervention
  StretchMark intervention{};             ///< that one
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
  /// Degrees of freedom of what is learned from these readings and carried over from earlier lots.
  [[nodiscard]] std::int64_t degrees_of(const Sums& sums) const {
    return stretch.carried().degrees + std::max<std::int64_t>(sums.n - 1, 0);
  }
  /// Do these readings say what the next one may be?
  [[nodiscard]] bool has_limits(const Sums& sums) const {
    return sums.n >= 1 && sums.n + stretch.carried().degrees >= kLeastForLimits;
  }
  /// Sample sd, with what is carried over, not below what the resolution allows; needs a degree of freedom.
  [[nodiscard]] double sd_of(const Sums& sums) const;
  /// Of what an alert compares: the readings, or the replicates within their runs.
  struct SdPair {
    std::optional<double> before, after;
  };
  [[nodiscard]] SdPair sds_of(const Change& change) const;
  [[nodiscard]] std::optional<MeanLevel> level_of(const Prefix& known) const;
  [[nodiscard]] std::optional<MeanLevel> present_level() const;
  [[nodiscard]] std::optional<ComparedMean> compared_mean() const;
  [[nodiscard]] double smallest_shift(const Sums& before) const;
  [[nodiscard]] Carried carry() const;
  [[nodiscard]] Repeatability repeatability() const;

  /// Of an open alert: which pattern, since when.
  [[nodiscard]] Change describe() const;
  /// The alert's finding as of now.
  [[nodiscard]] Finding finding(const Change& change) const;
  [[nodiscard]] Details details(const Change& change) const;
  [[nodiscard]] std::optional<double> score_of(EndingRule rule) const;
  /// The limit of the level at the n-th reading of the stretch. What is carried over from earlier lots makes
  /// its first readings no new question, for them it is the constant one.
  [[nodiscard]] double level_limit(std::int64_t n) const {
    return stretch.carried().degrees > 0 ? level.h : level_limit_at(n, level.h);
  }
  [[nodiscard]] bool matters(const Change& change) const;
  [[nodiscard]] Subject subject() const;
  [[nodiscard]] Finding ceased(AlertKind kind, Instant at, const char* reason) const;
  /// It is unstable no more.
  [[nodiscard]] Finding calmed(Instant at, const char* reason, std::int64_t set_aside_now) const;
  [[nodiscard]] Finding bias_finding() const;

  // Of a classical chart.
  void judge_by_limits(std::span<const CheckReading> run, std::vector<Finding>& findings);
  void restart_classical(Instant at, std::vector<Finding>& findings);
  [[nodiscard]] Finding classical_finding() const;
  [[nodiscard]] bool matters_by_limits() const;
  void show_classical(ChartView& view) const;

  void follow_lot(Instant at, std::vector<Finding>& findings);
  PointRecord& take(const Run& run);
  void adapt_precision_limit();
  void judge_bias(Instant at, std::vector<Finding>& findings);
  void keep_levels(const StretchMark& next, const std::optional<Change>& accepted);
  void test(PointRecord& point, std::vector<Finding>& findings);
  void follow_up(const PointRecord& point, std::vector<Finding>& findings);
  void open(EndingRule rule, std::size_t position, const char* pattern, std::vector<Finding>& findings);
  void close(const Aftermath& aftermath, Instant at, std::vector<Finding>& findings);
  void begin_stretch(Instant at, const std::string& what, const Carried& carried,
                     std::vector<Finding>& findings);
  void accept_level(Instant at, std::vector<Finding>& findings);
  void remember(const PointRecord& point);
  void remember_repeatability(Instant at);
  void mark(Instant at, const std::string& what);
  [[nodiscard]] ChartPoint shown(const PointRecord& record) const;
  [[nodiscard]] ChangeView change_view() const;
  [[nodiscard]] PrecisionView precision_view() const;
  [[nodiscard]] BaselineView baseline_view() const;
  [[nodiscard]] std::optional<ReferenceView> reference_view() const;
  void add_warnings(ChartView& view) const;
  [[nodiscard]] PointRecord* point(std::int64_t number);
  [[nodiscard]] std::optional<ReplicatesView> replicates_view() const;
  [[nodiscard]] std::optional<EffectView> intervention_effect() const;
  [[nodiscard]] std::optional<EffectView> since_first() const;
  [[nodiscard]] std::optional<double> correlation() const;
  [[nodiscard]] Stretch new_stretch(const Carried& carried, std::int64_t point_before) const;
};

}  // namespace agreed
