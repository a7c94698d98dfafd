#pragma once
// What a chart shows to the outside at one moment: plain data, independent of the fold that made it.
#include <cstdint>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "core/base/finding.hpp"
#include "core/base/index.hpp"
#include "core/base/instant.hpp"

namespace agreed {

enum class ChartState { learning, stable, unstable };
enum class ChartSignal : std::uint8_t {
  // of change-point charts
  single_high,
  single_low,
  shift_up,
  shift_down,
  scatter_up,
  // of classical charts
  above_limit,
  below_limit,
  moving_range_above_limit,
  range_above_limit,               ///< of the replicates of one run
  standard_deviation_above_limit,  ///< likewise
  ewma,
  cusum,
  same_side,
  trend,
  two_of_three_beyond,
  four_of_five_beyond,
  alternating,
  near_centre,
  away_from_centre,
};
[[nodiscard]] const char* to_string(ChartState state);
[[nodiscard]] const char* to_string(ChartSignal signal);

/// What a classical chart shows of one reading, as far as it was worked out; in the measurand's unit.
struct ClassicalPoint {
  std::optional<double> moving_range_upper;
  std::optional<double> spread, spread_upper;  ///< range or standard deviation of a run's replicates
  std::optional<double> ewma, ewma_upper, ewma_lower;
  std::optional<double> cusum_upper, cusum_lower;  ///< in standard deviations
  bool operator==(const ClassicalPoint&) const = default;
};

struct ChartPoint {
  Instant measured_at;
  double value = 0;
  std::optional<double> moving_range;     ///< |value - the one before in its stretch|
  std::optional<double> score;            ///< change score of the stretch up to here; none below 5 readings
  std::optional<double> precision_score;  ///< none below 7
  std::optional<double> upper,
      lower;  ///< what this reading could have been, from those before it; none while s is unknown
  std::vector<ChartSignal> signals;
  int replicates = 1;               ///< of the run whose mean the value is
  std::optional<double> within_sd;  ///< of those, from 2 on
  bool set_aside = false;
  bool starts_stretch = false;  ///< first reading after an intervention or of a new lot
  std::optional<ClassicalPoint> classical;
  bool operator==(const ChartPoint&) const = default;
};

struct ChangeView {
  std::optional<double> score;
  double limit = 0;      ///< from the 30th reading of a stretch on
  double limit_now = 0;  ///< at its newest reading
  double in_control_run_length = 0;
  bool extrapolated = false;  ///< the limit lies beyond the simulated table
  std::optional<Instant> started_at;
  std::optional<Period> started_between;
  std::optional<double> shift;
  bool operator==(const ChangeView&) const = default;
};

struct PrecisionView {
  std::optional<double> score;
  double limit = 0;
  double in_control_run_length = 0;
  bool extrapolated = false;
  std::optional<double> ratio_of_sd;
  bool operator==(const PrecisionView&) const = default;
};

struct BaselineView {
  int readings = 0;  ///< learned in the present stretch
  int needed = 30;
  std::optional<double> center, sd, sigma, sigma_degrees_of_freedom, moving_range_mean;
  std::int64_t sd_degrees_of_freedom = 0;  ///< with those carried over from earlier lots
  std::int64_t carried_over = 0;           ///< degrees of freedom from earlier lots
  std::optional<Instant> from, to;
  std::int64_t set_aside = 0;
  bool operator==(const BaselineView&) const = default;
};

struct ReferenceView {
  double value = 0;
  std::optional<double> expanded_uncertainty;
  double coverage_factor = 2;
  std::optional<double> bias, normalised_error;
  std::optional<double> allowed_bias;  ///< above it the standard is biased; none below 30 readings
  bool biased = false;                 ///< as told by the alert
  bool operator==(const ReferenceView&) const = default;
};

/// Runs of replicates among the readings learned, lots before included.
struct ReplicatesView {
  std::int64_t runs = 0;
  double per_run = 1;  ///< harmonic mean of the numbers of replicates
  double within_sd = 0;
  std::int64_t within_degrees_of_freedom = 0;
  std::optional<double> between_sd;  ///< of run means beyond that; none below 5 readings
  bool tell_precision = false;       ///< precision is told by them, not by the run means
  bool operator==(const ReplicatesView&) const = default;
};

/// Mean of the present stretch less an earlier one.
struct EffectView {
  std::string what;  ///< the intervention; empty: since the first stretch of this lot
  Instant at;        ///< of the intervention, or of the first reading compared with
  std::int64_t readings_before = 0, readings_after = 0;
  double mean_before = 0, mean_after = 0, difference = 0;
  std::optional<double> low, high;  ///< 95 % interval; none without scatter
  double confidence = 0.95;
  std::optional<double> allowable;  ///< allowable difference at the mean before
  bool operator==(const EffectView&) const = default;
};

/// The numbers behind a warning, by name.
struct WarningNumbers {
  std::string warning;
  std::vector<std::pair<std::string, double>> numbers;
  bool operator==(const WarningNumbers&) const = default;
};

struct StretchMark {
  Instant at;
  std::string what;  ///< intervention kind, or "lot ID"
  bool operator==(const StretchMark&) const = default;
};

/// The limits of a classical chart, of single readings, and where they come from.
struct ClassicalView {
  std::optional<double> center, sigma;             ///< none while the baseline is learned
  std::optional<double> sigma_degrees_of_freedom;  ///< of a given sigma if they were given
  bool center_given = false, sigma_given = false;
  bool within_runs = false;  ///< sigma is that of the replicates of a run
  std::optional<double> moving_range_upper;
  std::optional<Instant> alarm_started_at;
  std::optional<double> shift;  ///< of the open alert: mean since its start less the centre line
  bool operator==(const ClassicalView&) const = default;
};

struct ChartView {
  ChartIndex index;
  std::string lot;
  ChartState state = ChartState::learning;
  std::string pattern;  ///< of the open alert: single_reading, shift or scatter; empty when stable
  BaselineView baseline;
  std::optional<double> upper_limit, lower_limit;  ///< what the next reading may be
  ChangeView change;
  PrecisionView precision;
  std::optional<ClassicalView> classical;    ///< then change and precision say nothing
  std::optional<double> serial_correlation;  ///< of the readings learned, about their mean
  std::optional<double>
      correlation_allowed_for;  ///< about the two means at the best split; by the level score
  std::optional<ReferenceView> reference;
  std::int64_t censored = 0;                 ///< results left out since they only say "below" or "above"; not
                                             ///< folded, filled in by who keeps the results
  std::optional<ReplicatesView> replicates;  ///< none without any
  std::optional<EffectView> intervention_effect, since_first;
  std::optional<double> smallest_shift;  ///< below it a shift is a notice
  std::vector<std::string> warnings;
  std::vector<WarningNumbers> warning_numbers;  ///< of those warnings that have some
  std::vector<StretchMark> marks;
  std::vector<ChartPoint> points;  ///< oldest first, at most the newest 500
  bool operator==(const ChartView&) const = default;
};

}  // namespace agreed
