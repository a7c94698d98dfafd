#pragma once
// What a configuration will do, worked out: false alerts from the run lengths, waits and power by simulation
// with the service's own charts and comparisons (core/plan), and how that compares with what is wished.
//
// Charts of the same limits live by one law in units of their sd, so it is simulated once for all of them
// (`ChartLaw`). Where readings are so coarsely rounded that it shows, or a classical chart has a centre or
// sigma of its own, a chart has a law to itself. Steps beyond 10 sd are noticed as one of 10 is.
#include <functional>
#include <optional>
#include <string>
#include <vector>

#include "config/config.hpp"
#include "core/plan/false_alerts.hpp"
#include "core/plan/proof_search.hpp"
#include "daemon/plan/advice.hpp"
#include "daemon/plan/expected.hpp"
#include "daemon/plan/plan_wishes.hpp"
#include "daemon/plan/seen.hpp"
#include "daemon/plan/work.hpp"

namespace agreed::plan {

inline constexpr int kReadingsBefore = 100;  ///< in control before a step, of a chart
inline constexpr int kPairsBefore = 60;      ///< of a comparison
inline constexpr double kProofPower = 0.9;

/// How long a step takes to be noticed. Readings (pairs) with their Monte Carlo errors; nothing: not within
/// `horizon` of them.
struct StepWaits {
  double in_sds = 0;             ///< of one reading, of one pair
  std::optional<double> size{};  ///< in the measurand's unit; none while the sd is not known
  bool allowable = false;        ///< its size is the allowable difference
  int horizon = 0;
  std::optional<Simulated> half{}, nine_in_ten{};
  std::optional<Simulated> half_drifting{},
      half_lost{};  ///< of a comparison: by agreement_drifting alone, ...
};

struct ChartLaw {
  std::vector<ChartIndex> charts;  ///< that live by it
  std::vector<StepWaits> steps;    ///< of the usual sizes in sd
};

struct ChartPlan {
  ExpectedSd sd;
  std::size_t law = 0;
  std::optional<StepWaits> allowable;  ///< none while the sd, or what is allowable, is not known
};

/// Pairs to show agreement, for one true bias.
struct ProofPlanned {
  double bias = 0;         ///< the same at all levels
  bool bias_seen = false;  ///< it is the largest one seen, else 0
  ProofNeeds needs;
};

struct ComparisonPlan {
  ExpectedPairs pairs;
  std::optional<double> sd_of_pair;
  std::vector<StepWaits> steps;  ///< in the unit; in sd of a pair alone where the sds are not known
  std::vector<ProofPlanned> proofs;
  std::string no_proof;  ///< why there is none: sd_not_known, or as in core/plan/proof_search.hpp
};

struct BudgetAnswer {
  double wished = 0, expected = 0;
  bool met = false;
  WishedBudget budget{};
  std::vector<Advice> advice{};
};

struct StreamNotice {
  Stream stream;
  std::optional<Notice> notice{};  ///< none: an sd is not known
  std::string missing{};           ///< which
  double sd = 0;                   ///< of one point, of one pair, where known
  std::vector<Advice> advice{};    ///< of one that does not notice in time
};

/// A shift of one analyzer is noticed in time if one of its charts and comparisons does so.
struct AnalyzerNotice {
  AnalyzerIndex analyzer;
  std::vector<std::size_t> streams{};  ///< places among NoticeAnswer::streams
  bool met = false;
};

struct NoticeAnswer {
  MeasurandNotice wish;
  std::vector<StreamNotice> streams{};  ///< everything that watches the measurand
  std::vector<AnalyzerNotice> analyzers{};
  [[nodiscard]] bool met() const;
};

struct Plan {
  Seen seen;
  int trials = 0;
  FalseAlerts false_alerts;
  std::vector<ChartLaw> laws;
  std::vector<ChartPlan> charts;            ///< as in the settings
  std::vector<ComparisonPlan> comparisons;  ///< likewise
  std::optional<BudgetAnswer> budget;
  std::optional<NoticeAnswer> notice;
  [[nodiscard]] bool all_met() const;
};

/// The usual steps as this chart meets them, in its unit where its sd is known, and the allowable difference.
[[nodiscard]] std::vector<StepWaits> steps_of(const Plan& plan, ChartIndex chart);

/// The same for the same input. `tell` hears how far it is.
[[nodiscard]] Plan make_plan(const Settings& settings, Seen seen, const Wishes& wishes, int trials,
                             const Tell& tell);

}  // namespace agreed::plan
