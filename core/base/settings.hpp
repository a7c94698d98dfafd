#pragma once
// What the monitor needs to know of the configuration: validated, with every default filled in and every
// share of the alarm budget worked out. Made by config/, never changed afterwards.
//
// Direction, once for the whole program: a comparison fits y = intercept + slope * x; a difference is y - x,
// so a positive one says that y reads high; lambda = var(x error) / var(y error), delta = 1 / lambda.
#include <algorithm>
#include <cmath>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "core/base/index.hpp"
#include "core/base/instant.hpp"

namespace agreed {

struct Analyzer {
  std::string id;
  std::string title;
};

/// The largest difference between the analyzers that does no harm; at a level the larger of the parts given.
struct AllowableDifference {
  std::optional<double> absolute;  ///< in the measurand's unit, > 0
  std::optional<double> percent;   ///< of |level|, > 0

  [[nodiscard]] double at(double level) const {
    return std::max(absolute.value_or(0.0), percent.value_or(0.0) / 100.0 * std::abs(level));
  }
};

struct Measurand {
  std::string id;
  std::string title;
  std::string unit;
  std::optional<int> decimals;  ///< resolution of the results, 10^-decimals
  std::vector<double> decision_levels;
  std::optional<AllowableDifference> allowable;
};

struct ReferenceValue {
  double value = 0;
  std::optional<double> expanded_uncertainty;
  double coverage_factor = 2;
};

/// One lot of a check standard, as one measurand sees it.
struct Lot {
  std::string id;
  std::optional<Instant> from;  ///< none: since ever
  std::optional<ReferenceValue> reference;
};

struct Standard {
  std::string id;
  std::string title;
};

/// Counts of the run rules that are switched on; 0 = off (classical charts only).
struct RunRules {
  int same_side = 0, trend = 0, two_of_three_beyond = 0, four_of_five_beyond = 0, alternating = 0,
      near_centre = 0, away_from_centre = 0;

  bool operator==(const RunRules&) const = default;
};

/// How the spread of the replicates of one run is measured on a classical chart.
enum class RunSpread { standard_deviation, range };

struct ClassicalSettings {
  std::optional<double> center, sigma;             ///< from an earlier study; sigma of one reading
  std::optional<double> sigma_degrees_of_freedom;  ///< behind a given sigma; none: taken as exact
  RunSpread run_spread = RunSpread::standard_deviation;
  std::optional<double> ewma_weight, ewma_width;
  std::optional<double> cusum_allowance, cusum_limit;
  RunRules run_rules;
};

enum class ChartMethod { change_point, classical };

/// Mean readings between false signals of a classical chart, as what was chosen for it makes it.
struct ExpectedRunLength {
  double readings = 0;          ///< the honest figure: with limits from the baseline, or the study, there is
  double standard_error = 0;    ///< of that figure, from its simulation; 0: worked out exactly
  double known_parameters = 0;  ///< if centre and sigma were known exactly
  double known_standard_error = 0;
  // Of the parts alone, with known parameters; 0: not chosen, or only simulated together with the others.
  double limits = 0, limits_and_moving_range = 0, limits_and_run_rules = 0, ewma = 0, cusum = 0;

  bool operator==(const ExpectedRunLength&) const = default;
};

/// One chart: one check standard's one measurand on one analyzer.
struct ChartSettings {
  AnalyzerIndex analyzer;
  StandardIndex standard;
  MeasurandIndex measurand;
  ChartMethod method = ChartMethod::change_point;
  int baseline = 30;       ///< readings until `learning` ends
  int split_memory = 400;  ///< newest readings that may be the start of a change
  int clear_after = 3;
  std::optional<double> own_run_length;  ///< as configured, of each score; none: its share decides
  double level_run_length = 0;           ///< in-control run length of the level score, readings
  double precision_run_length = 0;       ///< the same of the precision score
  std::optional<double> smallest_shift;
  Duration every{};       ///< for the alarm budget
  bool overdue = false;   ///< `every` was given, so a missing reading may be called overdue
  std::vector<Lot> lots;  ///< by `from`, at least one
  ClassicalSettings classical;
  ExpectedRunLength expected;  ///< of a classical chart
};

enum class ErrorSource { check_standards, given_sds, given_lambda, replicates };

struct ErrorRatioSettings {
  ErrorSource source = ErrorSource::check_standards;
  double sd_x = 0, sd_y = 0;  ///< given_sds
  double lambda = 0;          ///< given_lambda
};

/// A relation that was established before and is to hold: y = intercept + slope * x.
struct EstablishedLine {
  double intercept = 0, slope = 1;
  bool operator==(const EstablishedLine&) const = default;
};

enum class FitMethod { deming, weighted_deming };

/// How the error of a single result goes with the level: sd constant, proportional to the level, or
/// sqrt(a^2 + b^2 level^2).
enum class ErrorGrowth { constant, proportional, mixed };

struct ComparisonSettings {
  std::string id;
  std::string title;
  MeasurandIndex measurand;
  AnalyzerIndex x, y;
  int window_pairs = 200;              ///< 3..1000
  std::optional<Duration> window_age;  ///< counted back from the newest pair
  ErrorRatioSettings error_ratio;
  ErrorGrowth error_growth = ErrorGrowth::constant;
  FitMethod fit = FitMethod::deming;
  double confidence = 0.95;
  int confirm = 3;
  double alert_confidence = 0.999;
  int least_pairs = 20;
  Duration pair_within = std::chrono::hours(24);
  Duration every{};  ///< for the alarm budget
  bool overdue = false;
  bool set_outliers_aside = true;
  int split_memory = 400;
  std::optional<double> own_run_length;  ///< as configured, of the warning; none: its share decides
  double warning_run_length = 0;  ///< of the pair chart's warning, pairs; critical is ten times as long
  double outlier_run_length = 0;  ///< pairs between false outliers
  double scatter_run_length = 0;  ///< pairs between false `sample_scatter`
  std::optional<Duration> prove_within;
  std::optional<EstablishedLine>
      relation;  ///< what the pair chart holds the pairs against; none: their own line
};

/// How the yearly allowance of false alerts is spent.
struct AlarmBudget {
  double allowed_per_year = 6;
  double expected_per_year = 0;
  std::map<std::string, double> by_kind;  ///< alert kind -> expected a year
};

struct Settings {
  std::string site;
  std::vector<Analyzer> analyzers;              ///< by id
  std::vector<Measurand> measurands;            ///< by id
  std::vector<Standard> standards;              ///< by id
  std::vector<ChartSettings> charts;            ///< by (analyzer, standard, measurand)
  std::vector<ComparisonSettings> comparisons;  ///< by id
  AlarmBudget alarm_budget;

  [[nodiscard]] const Analyzer& of(AnalyzerIndex i) const { return analyzers.at(i.value); }
  [[nodiscard]] const Measurand& of(MeasurandIndex i) const { return measurands.at(i.value); }
  [[nodiscard]] const Standard& of(StandardIndex i) const { return standards.at(i.value); }
  [[nodiscard]] const ChartSettings& of(ChartIndex i) const { return charts.at(i.value); }
  [[nodiscard]] const ComparisonSettings& of(ComparisonIndex i) const { return comparisons.at(i.value); }
};

}  // namespace agreed
