#pragma once
// What a chart shows to the outside at one moment: plain data, independent of the fold that made it.
#include <cstdint>
#include <optional>
#include <string>
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

struct ChartPoint {
  Instant measured_at;
  double value = 0;
  std::optional<double> moving_range;     ///< |value - the one before in its stretch|
  std::optional<double> score;            ///< change score of the stretch up to here; none below 5 readings
  std::optional<double> precision_score;  ///< none below 7
  std::optional<double> upper,
      lower;  ///< what this reading could have been, from those before it; none while s is unknown
  std::vector<ChartSignal> signals;
  bool set_aside = false;
  bool starts_stretch = false;  ///< first reading after an intervention or of a new lot
  bool operator==(const ChartPoint&) const = default;
};

struct ChangeView {
  std::optional<double> score;
  double limit = 0;
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
  std::optional<Instant> from, to;
  std::int64_t set_aside = 0;
  bool operator==(const BaselineView&) const = default;
};

struct ReferenceView {
  double value = 0;
  std::optional<double> expanded_uncertainty;
  double coverage_factor = 2;
  std::optional<double> bias, normalised_error;
  bool operator==(const ReferenceView&) const = default;
};

struct StretchMark {
  Instant at;
  std::string what;  ///< intervention kind, or "lot ID"
  bool operator==(const StretchMark&) const = default;
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
  std::optional<double> serial_correlation;
  std::optional<ReferenceView> reference;
  std::vector<std::string> warnings;
  std::vector<StretchMark> marks;
  std::vector<ChartPoint> points;  ///< oldest first, at most the newest 500
  bool operator==(const ChartView&) const = default;
};

}  // namespace agreed
