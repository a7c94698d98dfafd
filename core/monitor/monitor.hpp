#pragma once
// The monitor: a fold over events. Same settings and same set of events = same state, to the last bit, on
// every machine, in whatever batches and order the events arrived.
#include <cstdint>
#include <map>
#include <memory>
#include <optional>
#include <set>
#include <span>
#include <string>
#include <vector>

#include "core/base/event.hpp"
#include "core/base/finding.hpp"
#include "core/base/settings.hpp"
#include "core/chart/chart.hpp"
#include "core/diagnosis/diagnosis.hpp"
#include "core/monitor/history.hpp"
#include "core/monitor/pairing.hpp"
#include "core/pair/comparison.hpp"

namespace agreed {

/// What one batch led to.
struct MonitorOutcome {
  std::vector<Finding> findings;        ///< in fold order; none from streams that were folded again
  std::set<ChartIndex> charts_changed;  ///< to be shown anew
  std::set<ComparisonIndex> comparisons_changed;
  std::set<ComparisonIndex> comparisons_paired;  ///< a pair of them was made
  std::set<ChartIndex> charts_refolded;          ///< their conditions must be compared with the alert book
  std::set<ComparisonIndex> comparisons_refolded;
  /// Of those folded again: the samples set aside anywhere in their history.
  std::map<ComparisonIndex, std::vector<std::string>> set_aside;
};

/// What is known of an open change of a comparison.
struct ExplainedChange {
  DiagnosisView diagnosis;
  LookBackView look_back;
};

/// Whom a chart's or a comparison's alerts are about.
[[nodiscard]] Subject subject_of(const Settings& settings, ChartIndex chart);
[[nodiscard]] Subject subject_of(const Settings& settings, ComparisonIndex comparison);

class Monitor {
 public:
  explicit Monitor(std::shared_ptr<const Settings> settings);

  /// Folds a batch. Streams for which it comes too late, or from which something was taken back, are folded
  /// again from `history`, which already holds the batch.
  [[nodiscard]] MonitorOutcome apply(std::vector<Event> batch, History& history);

  /// Says that something of a stream was taken back; takes effect with the next `apply`.
  void take_back(AnalyzerIndex analyzer, StandardIndex standard, MeasurandIndex measurand);
  void take_back_split(AnalyzerIndex analyzer, MeasurandIndex measurand);

  /// Folds everything from the beginning (at start, after a failed batch, after a reload).
  MonitorOutcome fold_all(History& history);

  [[nodiscard]] std::vector<Finding> conditions(ChartIndex chart) const;
  [[nodiscard]] std::vector<Finding> conditions(ComparisonIndex comparison) const;
  /// While a change of the comparison is open: which analyzer moved and what is in doubt, by all that is
  /// known now. Not folded; it changes with every reading and pair.
  [[nodiscard]] std::optional<ExplainedChange> explain(ComparisonIndex comparison) const;
  /// Comparisons with an open change of which this batch may say more.
  [[nodiscard]] std::vector<ComparisonIndex> explained_anew(const MonitorOutcome& outcome) const;
  [[nodiscard]] const Chart& chart(ChartIndex index) const { return charts_.at(index.value).fold; }
  [[nodiscard]] const Comparison& comparison(ComparisonIndex index) const {
    return comparisons_.at(index.value).fold;
  }
  [[nodiscard]] std::int64_t waiting(ComparisonIndex index) const {
    return comparisons_.at(index.value).memory.waiting();
  }
  /// Whether the half that this result belongs to has no partner in the comparison. False for a result that
  /// was taken back, or of a sample so long ago that it is not remembered.
  [[nodiscard]] bool lacks_partner(ComparisonIndex index, const SplitReading& result) const;
  [[nodiscard]] std::optional<ChartIndex> find_chart(AnalyzerIndex analyzer, StandardIndex standard,
                                                     MeasurandIndex measurand) const;

 private:
  struct ChartStream {
    Chart fold;
    std::optional<Instant> last;           ///< time of the newest run folded
    std::vector<ComparisonIndex> read_by;  ///< comparisons that take lambda from it
    bool stale = false;
  };
  struct ComparisonStream {
    Comparison fold;
    SampleMemory memory;
    std::optional<std::pair<Instant, std::string>> last;  ///< time and sample of the newest pair folded
    std::vector<ChartIndex> x_charts, y_charts;
    std::optional<ErrorRatio> given;
    bool stale = false;
  };
  struct DuePair {
    Pair pair;
    ComparisonIndex comparison;
  };
  using Trace = std::vector<Repeatability>;
  using Traces = std::vector<std::optional<Trace>>;  ///< by ChartIndex
  struct FoldedChart {
    Chart fold;
    std::optional<Instant> last;
    Trace trace;  ///< repeatability after each event
  };

  void mark_late(const std::vector<Event>& batch);
  void mark_late(const CheckReading& reading);
  void mark_late(const Intervention& intervention);
  /// Streams with a pair due whose error ratio the charts, as they stand, cannot tell: stale. Before anything
  /// is folded, so that what a stream knew before the batch is still there to compare with.
  void mark_unjudged(const std::vector<DuePair>& due);
  [[nodiscard]] std::vector<DuePair> pair_up(const std::vector<Event>& batch, History& history);
  void pair_up(ComparisonIndex index, std::span<const SplitReading*> rows, History& history,
               std::vector<DuePair>& due);
  void pair_up_sample(ComparisonIndex index, std::span<const SplitReading* const> rows, History& history,
                      std::vector<DuePair>& due);
  [[nodiscard]] SampleRows forgotten_rows(ComparisonIndex index,
                                          std::span<const SplitReading* const> in_batch,
                                          History& history) const;
  /// Readings that share chart and time: one run.
  void fold(std::span<const CheckReading> run, MonitorOutcome& outcome);
  void fold(const Event& event, MonitorOutcome& outcome);
  void fold(const DuePair& due, MonitorOutcome& outcome);
  [[nodiscard]] bool of_refolded(const Subject& subject, const MonitorOutcome& outcome) const;
  void refold_stale(History& history, MonitorOutcome& outcome);
  /// A chart folded on the side, from the beginning.
  [[nodiscard]] FoldedChart fold_chart(ChartIndex index, History& history,
                                       const std::vector<Intervention>& interventions) const;
  Trace refold(ChartIndex index, History& history, const std::vector<Intervention>& interventions);
  /// Appends the findings of pairs set aside that were not so in the fold before.
  void refold_and_compare(ComparisonIndex index, History& history,
                          const std::vector<Intervention>& interventions, Traces& traces,
                          MonitorOutcome& outcome, std::vector<Finding>& newly_set_aside);
  /// The findings of all pairs set aside.
  std::vector<Finding> refold(ComparisonIndex index, History& history,
                              const std::vector<Intervention>& interventions, Traces& traces);
  [[nodiscard]] std::vector<Pair> pair_all(ComparisonStream& stream, ComparisonIndex index,
                                           History& history) const;
  [[nodiscard]] std::optional<ErrorRatio> ratio_at(const ComparisonStream& stream, ComparisonIndex index,
                                                   Instant at, const Traces* traces) const;
  [[nodiscard]] std::optional<std::vector<Repeatability>> standards_at(std::span<const ChartIndex> charts,
                                                                       Instant at,
                                                                       const Traces* traces) const;
  [[nodiscard]] CheckShift shift_of(std::span<const ChartIndex> charts, const Moment& moment,
                                    double resolution) const;
  [[nodiscard]] bool concerns(const Intervention& intervention, const ComparisonSettings& comparison) const;

  std::shared_ptr<const Settings> settings_;
  std::vector<ChartStream> charts_;
  std::vector<ComparisonStream> comparisons_;
};

}  // namespace agreed
