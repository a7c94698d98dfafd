#pragma once
// What a comparison shows to the outside at one moment: plain data, independent of the fold that made it.
#include <array>
#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "core/base/finding.hpp"
#include "core/base/index.hpp"
#include "core/base/instant.hpp"

namespace agreed {

/// Who moved when the relation changed; `neither`: the samples differ; `undecided`: not known yet.
enum class Moved { x, y, both, neither, undecided };
[[nodiscard]] const char* to_string(Moved moved);

enum class Verdict { gathering, inconclusive, agreement_shown, disagreement_shown };
enum class PairChartState { learning, stable, unstable };
[[nodiscard]] const char* to_string(Verdict verdict);
[[nodiscard]] const char* to_string(PairChartState state);

using Interval = std::array<double, 2>;

struct WindowView {
  int pairs = 0;
  int capacity = 0;
  std::optional<Instant> from, to;
  std::optional<Instant> since_intervention;  ///< start of the present stretch, when something began one
  bool operator==(const WindowView&) const = default;
};

/// sd of one analyzer's single results at a level: sqrt(constant^2 + (relative level)^2).
struct ErrorModelSide {
  double constant = 0, relative = 0;
  std::optional<double> df;  ///< of its variance at `level` of the model
  bool operator==(const ErrorModelSide&) const = default;
};

/// How the errors go with the level. Sides are null while nothing but their ratio is known.
struct ErrorModelView {
  std::string growth = "constant";  ///< constant, proportional, mixed
  std::optional<double> level;      ///< where lambda, sd_x and sd_y hold, when they do not everywhere
  std::optional<ErrorModelSide> x, y;
  bool operator==(const ErrorModelView&) const = default;
};

/// The error variances of single results, and lambda = var(x error) / var(y error) with its 95 % interval.
struct ErrorView {
  std::optional<double> lambda, low, high, sd_x, sd_y, df_x, df_y;
  std::string source;  ///< check_standards, given_sds, given_lambda, replicates
  std::string reason;  ///< why lambda is not known, when it is not
  ErrorModelView model;
  bool operator==(const ErrorView&) const = default;
};

struct FitView {
  std::string method = "deming";        ///< deming, weighted_deming, york
  std::string se_method = "jackknife";  ///< of se_intercept, se_slope, cov and all intervals
  double intercept = 0, slope = 1;
  double se_intercept = 0, se_slope = 0, cov = 0;
  double analytic_se_intercept = 0, analytic_se_slope = 0;
  Interval intercept_interval{}, slope_interval{};
  double confidence = 0.95;
  double identity_p = 1;  ///< joint test of intercept 0 and slope 1
  std::optional<double> slope_at_lambda_low, slope_at_lambda_high;
  bool operator==(const FitView&) const = default;
};

struct SingleResultView {
  double share_within = 0, low = 0, high = 0;
  bool operator==(const SingleResultView&) const = default;
};

struct LevelView {
  double level = 0;
  std::optional<double> bias, se, low, high;  ///< 90 % interval: two one-sided 5 % tests
  std::optional<double> allowable;
  Verdict verdict = Verdict::gathering;
  std::string reason;
  std::optional<SingleResultView> single_result;
  bool operator==(const LevelView&) const = default;
};

/// Mean, sd and limits of agreement of differences, in one unit.
struct AgreementLimits {
  double mean = 0, sd = 0;
  Interval mean_interval{};
  double lower_limit = 0, upper_limit = 0;
  Interval lower_limit_interval{}, upper_limit_interval{};
  bool operator==(const AgreementLimits&) const = default;
};

struct DifferenceView : AgreementLimits {
  /// The same of 100 (y - x) / ((x + y) / 2), when what is allowable is given in percent only.
  std::optional<AgreementLimits> percent;
  std::optional<int> within_count, within_of;
  std::optional<Interval> within_interval;
  std::optional<double> paired_t_p;
  bool operator==(const DifferenceView&) const = default;
};

/// The line by ranks (passing_bablok.hpp); intervals at the confidence of the fit.
struct RobustView {
  double slope = 1, intercept = 0;
  std::optional<Interval> slope_interval, intercept_interval;
  bool operator==(const RobustView&) const = default;
};

struct ScatterView {
  double observed_sd = 0, expected_sd = 0, variance_ratio = 0, p = 1;
  bool excess = false;
  bool operator==(const ScatterView&) const = default;
};

struct RangeView {
  double reliability_ratio = 0;
  bool adequate = false;
  bool covers_levels = false;
  bool operator==(const RangeView&) const = default;
};

struct PairChartView {
  PairChartState state = PairChartState::learning;
  int pairs = 0;
  std::optional<double> score;
  double limit = 0, critical_limit = 0, in_control_run_length = 0;
  bool extrapolated = false;
  std::optional<Severity> severity;  ///< of the open signal
  std::optional<Instant> started_at;
  std::optional<Period> started_between;
  bool against_established_line = false;  ///< else against the pairs' own line
  bool operator==(const PairChartView&) const = default;
};

/// What would decide an inconclusive verdict (core/pair/proof_plan.hpp).
struct ProofView {
  bool overdue = false;  ///< inconclusive for longer than prove_within
  double level = 0;
  Verdict aim = Verdict::agreement_shown;
  std::optional<int> more_pairs;
  std::optional<double> sd_needed;  ///< residual sd that would decide it with the present pairs
  double residual_sd = 0;
  std::string reason;  ///< why no number of pairs would
  bool operator==(const ProofView&) const = default;
};

struct OutlierView {
  std::string sample;
  Instant measured_at;
  double residual = 0, p = 1;  ///< studentised, at arrival
  bool operator==(const OutlierView&) const = default;
};

struct PairView {
  std::string sample;
  Instant measured_at;
  double x = 0, y = 0;
  int x_replicates = 1, y_replicates = 1;
  std::optional<double> residual;  ///< studentised, from the present line
  bool in_window = false;
  bool outlier = false;
  bool operator==(const PairView&) const = default;
};

/// What the change found by the pair chart or the lost agreement goes back to (core/diagnosis).
struct DiagnosisView {
  Moved moved = Moved::undecided;
  double probability = 0;                 ///< of the most probable explanation
  std::array<double, 4> probabilities{};  ///< of x, y, both, neither
  std::string evidence;                   ///< in plain words, with numbers and units
  /// Shift of y - slope x of the pairs, and of the check standards, with standard errors.
  std::optional<double> shift_pairs, se_pairs, shift_x, se_x, shift_y, se_y;
  int pairs_before = 0, pairs_after = 0;
  int x_readings_before = 0, x_readings_after = 0, y_readings_before = 0, y_readings_after = 0;
  std::optional<Instant> started_at;
  std::optional<Period> started_between;
  bool operator==(const DiagnosisView&) const = default;
};

/// The results in doubt: from the last pair before the earliest likely start at which agreement was shown
/// (else from the first pair of all) to the newest pair.
struct LookBackView {
  Instant from, to;
  bool from_agreement = false;       ///< false: from the start of data
  std::int64_t pairs = 0;            ///< after `from`; of all data: all
  std::vector<std::string> samples;  ///< of the newest 1,000 of them, oldest first
  double hours = 0;

  [[nodiscard]] const char* from_is() const { return from_agreement ? "agreement_shown" : "start_of_data"; }
  bool operator==(const LookBackView&) const = default;
};

/// The bias at each decision level as it stood at one pair, for the page's picture of bias over time.
struct BiasPoint {
  Instant at;
  std::vector<std::array<double, 3>> levels;  ///< bias, low, high; one per decision level
  bool operator==(const BiasPoint&) const = default;
};

struct ComparisonView {
  ComparisonIndex index;
  Verdict verdict = Verdict::gathering;
  std::optional<Instant> verdict_since;
  std::string verdict_reason;
  std::optional<Instant> last_agreement;  ///< newest pair at which the verdict was agreement_shown
  std::optional<Instant>
      agreement_lost;              ///< since when agreement is lost and not shown again; none: it is not
  std::optional<ProofView> proof;  ///< while the verdict is inconclusive and enough pairs came
  std::vector<std::string> warnings;
  std::int64_t pairs_total = 0;
  std::int64_t waiting = 0;  ///< halves without a partner
  WindowView window;
  ErrorView error;
  std::optional<FitView> fit;
  std::string fit_reason;  ///< why there is no fit, when there is none
  std::vector<LevelView> levels;
  std::optional<DifferenceView> difference;
  std::optional<RobustView> robust;
  std::optional<double> concordance;
  std::optional<ScatterView> scatter;
  std::optional<RangeView> range;
  PairChartView pair_chart;
  std::optional<DiagnosisView> diagnosis;  ///< filled in by the monitor, which knows the check standards
  std::optional<LookBackView> look_back;
  std::vector<OutlierView> outliers;
  std::vector<BiasPoint> bias_history;  ///< oldest first, at most 500
  std::vector<PairView> pairs;          ///< oldest first, at most the newest 500
  bool operator==(const ComparisonView&) const = default;
};

}  // namespace agreed
