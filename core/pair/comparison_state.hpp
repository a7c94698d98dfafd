#pragma once
// What a comparison remembers between two pairs: bounded, and determined by the events alone. Private to
// core/pair.
#include <cstdint>
#include <deque>
#include <optional>
#include <string_view>
#include <vector>

#include "core/base/settings.hpp"
#include "core/pair/agreement_record.hpp"
#include "core/pair/comparison.hpp"
#include "core/pair/drift_alarm.hpp"
#include "core/pair/outlier.hpp"
#include "core/pair/pair_chart.hpp"
#include "core/pair/proof_plan.hpp"
#include "core/pair/replicate_errors.hpp"
#include "core/pair/t_table.hpp"
#include "core/pair/verdict.hpp"
#include "core/pair/window_fit.hpp"

namespace agreed {

/// What one decision level says at the newest pair.
struct LevelNow {
  double level = 0;
  double allowable = 0;
  Bias bias;
  Interval plain{};  ///< 90 %
  Interval alert{};  ///< at alert_confidence
  LevelStatement statement;
};

enum class PairOutcome { accepted, held, set_aside };

/// One of the newest pairs and what became of it.
struct RecentPair {
  Pair pair;
  std::int64_t serial = 0;
  PairOutcome outcome = PairOutcome::accepted;
  double residual = 0, p = 1;  ///< at arrival, of those held or set aside
};

/// Of a pair older than those kept whole, for the look-back.
struct OlderPair {
  std::string sample;
  Instant at{};
};

/// What a critical signal leaves of the stretch that ends at the estimated start. Further critical signals,
/// until agreement is shown again, leave it as it is: the change in question is all that came since.
struct RememberedStart {
  Instant started_at{};
  Period started_between{};
  Moments before;                          ///< of the newest pairs before it
  Instant since{};                         ///< start of that stretch
  std::int64_t first_after = 0;            ///< number of the first pair after it
  std::optional<PairMark> last_agreement;  ///< before the earliest likely start
};

struct Comparison::State {
  State(const Settings& all_settings, ComparisonIndex comparison);

  const Settings* settings;
  ComparisonIndex index;
  double resolution;  ///< of the results, 0 when not known
  Window window;
  PairChart chart;
  DriftAlarm alarm;
  OutlierPolicy outliers;
  VerdictMachine verdict;
  TTable t_plain, t_alert;
  ErrorRatio ratio;
  WindowFit fit;
  std::vector<LevelNow> levels;                 ///< empty without a fit or an allowable difference
  int pairs_since_renewal = 0;                  ///< pairs since the tests of a renewed window
  bool scatter_excess = false, curved = false;  ///< at the last full renewal of the window
  std::deque<RecentPair> recent;
  std::deque<OlderPair> older;  ///< the 500 before those
  std::deque<BiasPoint> bias_history;
  AgreementRecord agreement;
  std::optional<Instant> first_pair_at;
  std::optional<RememberedStart> restarted;  ///< at the first critical signal of those open
  std::int64_t pairs_total = 0;
  std::optional<Instant> last_at, stretch_from, last_agreement;
  /// The conditions that hold, as last found.
  std::optional<Finding> lost, drifting, unproven, scattered;

  [[nodiscard]] const ComparisonSettings& config() const { return settings->of(index); }
  [[nodiscard]] const Measurand& measurand() const { return settings->of(config().measurand); }
  /// Why there can never be a verdict with these settings; empty: there can.
  [[nodiscard]] std::string_view no_verdict() const;
  [[nodiscard]] Deltas deltas() const;
  /// The error ratio comes from the replicates of the newest 500 pairs, not with each pair.
  [[nodiscard]] bool takes_replicates() const {
    return config().error_ratio.source == ErrorSource::replicates;
  }

  void add(const Pair& pair, std::vector<Finding>& findings);
  void begin_stretch(Instant at, std::vector<Finding>& findings);

 private:
  [[nodiscard]] ErrorRatio ratio_of_replicates() const;
  void accept(const Pair& pair, std::int64_t serial, int later);
  void set_aside(const std::vector<HeldPair>& pairs, Instant at, std::vector<Finding>& findings);
  void drop_oldest();
  RecentPair* recent_of(std::int64_t serial);
  void evaluate(Instant at, std::vector<Finding>& findings);
  void watch_for_change(Instant at, std::vector<Finding>& findings);
  void test_renewed_window(Instant at, std::vector<Finding>& findings);
  void test_scatter(Instant at, std::vector<Finding>& findings);
  void judge_levels(Instant at);
  void move_verdict(Instant at, std::vector<Finding>& findings);
  void watch_proof(Instant at, std::vector<Finding>& findings);
};

/// The findings of a comparison. Their details, by name (values in the measurand's unit unless said):
///   all            measurand, unit, x, y: ids and the unit
///   agreement_lost level, bias (y - x), low, high (interval at `confidence`), confidence, allowable, slope,
///                  intercept, pairs (in the window); fit (york, weighted_deming) when it is weighted
///   agreement_drifting  score, limit (crossed), critical_limit (scores, in sd), shift (mean residual of y
///                  after minus before), pairs_before, pairs_after; against an established line also
///                  relation_intercept, relation_slope
///   agreement_unproven  inconclusive_since (RFC 3339), pairs, residual_sd, window_pairs (its capacity);
///   level,
///                  bias, allowable, aim (the verdict that the bias points at), pairs_needed, sd_needed;
///                  instead of those two `reason` when no number of pairs would decide it
///   sample_scatter observed_sd, expected_sd, sd_ratio, variance_ratio, p, pairs, from, to (RFC 3339)
///   pair_outlier   sample, x_value, y_value, measured_at (RFC 3339), residual (studentised), p
[[nodiscard]] Finding agreement_lost_finding(const Comparison::State& state, Instant at);
[[nodiscard]] Finding agreement_drifting_finding(const Comparison::State& state, Instant at);
[[nodiscard]] Finding agreement_unproven_finding(const Comparison::State& state, Instant at);
[[nodiscard]] Finding sample_scatter_finding(const Comparison::State& state, const ScatterView& scatter,
                                             Instant at);
[[nodiscard]] Finding pair_outlier_finding(const Comparison::State& state, const RecentPair& pair,
                                           Instant at);

/// What would decide the verdict; nothing without levels that speak.
[[nodiscard]] std::optional<ProofPlan> proof_plan_of(const Comparison::State& state);
/// The newest pair before `at` at which agreement was shown.
[[nodiscard]] std::optional<PairMark> last_agreement_before(const Comparison::State& state, Instant at);
/// At a critical signal, before the stretch restarts.
[[nodiscard]] RememberedStart remember_start(const Comparison::State& state);

/// The view of a state.
[[nodiscard]] ComparisonView show(const Comparison::State& state);

}  // namespace agreed
