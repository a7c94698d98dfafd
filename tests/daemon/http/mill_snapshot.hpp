#pragma once
// Harrow Mill as an engine might show it: two analyzers, two check standards, one comparison; and a service
// that shows it.
#include <map>
#include <memory>
#include <mutex>
#include <string>

#include "daemon/engine/service.hpp"

namespace agreed::test {

inline Instant at_hour(int hour) {
  return Instant{std::chrono::sys_days{std::chrono::year{2026} / 1 / 5}} + std::chrono::hours(hour);
}

/// Two charts of protein on line1 (wheat-high, wheat-low), one on line2, and the comparison `protein`.
inline std::shared_ptr<const Settings> mill_settings() {
  Settings settings;
  settings.site = "Harrow Mill";
  settings.analyzers = {{"line1", "NIR analyzer, packing line 1"}, {"line2", "NIR analyzer, packing line 2"}};
  settings.measurands = {{"protein", "Protein", "g/100 g", 2, {10.5, 13.0}, AllowableDifference{0.2, {}}}};
  settings.standards = {{"wheat-high", "Wheat high"}, {"wheat-low", "Wheat low"}};
  const auto chart = [](std::uint32_t analyzer, std::uint32_t standard) {
    ChartSettings made;
    made.analyzer = {analyzer};
    made.standard = {standard};
    made.lots = {Lot{"2026-A", {}, {}}};
    return made;
  };
  settings.charts = {chart(0, 0), chart(0, 1), chart(1, 1)};
  ComparisonSettings comparison;
  comparison.id = "protein";
  comparison.title = "Protein, line 1 against line 2";
  comparison.x = {0};
  comparison.y = {1};
  comparison.prove_within = std::chrono::hours(24);
  settings.comparisons = {comparison};
  settings.alarm_budget = {6, 5.5, {{"agreement_drifting", 1.5}, {"check_standard_unstable", 4}}};
  return std::make_shared<const Settings>(std::move(settings));
}

/// As right after the start: nothing has come, the views are not there yet.
inline Snapshot empty_snapshot() {
  Snapshot snapshot;
  snapshot.at = at_hour(10);
  snapshot.started_at = at_hour(9);
  snapshot.config_sha256 = std::string(64, 'c');
  snapshot.not_ready = {"line1: the first scan of its inbox is not done"};
  snapshot.settings = mill_settings();
  snapshot.analyzers.resize(2);
  snapshot.charts.resize(3);
  snapshot.chart_states.resize(3);
  snapshot.comparisons.resize(1);
  return snapshot;
}

inline ChartView full_chart() {
  ChartView view;
  view.index = {1};
  view.lot = "2026-A";
  view.state = ChartState::unstable;
  view.pattern = "shift";
  view.baseline = {30, 30, 10.62, 0.022, 0.021, 17.97, 0.0237, 29, 0, at_hour(0), at_hour(9), 1};
  view.upper_limit = 10.71;
  view.lower_limit = 10.53;
  view.change = {4.5, 4.08, 4.08, 3650, false, at_hour(7), Period{at_hour(6), at_hour(8)}, 0.08};
  view.precision = {0.4, 3.62, 3650, false, {}};
  view.serial_correlation = 0.05;
  view.reference = ReferenceView{10.62, 0.08, 2, 0.003, 0.04, {}, false};
  view.warnings = {"resolution_too_coarse"};
  view.marks = {{at_hour(1), "recalibrated"}};
  for (int i = 0; i < 7; ++i) {
    ChartPoint point;
    point.measured_at = at_hour(i);
    point.value = 10.6 + 0.01 * i;
    if (i > 0) point.moving_range = 0.01;
    if (i >= 4) point.score = 1.0 + i;
    point.starts_stretch = i == 1;
    if (i == 6) point.signals = {ChartSignal::single_high, ChartSignal::shift_up};
    view.points.push_back(point);
  }
  return view;
}

inline ComparisonView full_comparison() {
  ComparisonView view;
  view.verdict = Verdict::agreement_shown;
  view.verdict_since = at_hour(3);
  view.last_agreement = at_hour(9);
  view.warnings = {"few_pairs_at_13"};
  view.pairs_total = 150;
  view.waiting = 2;
  view.window = {140, 200, at_hour(0), at_hour(9), at_hour(0)};
  view.error = {0.81, 0.4, 1.6, 0.018, 0.020, 17.9, 17.9, "check_standards", "", {}};
  FitView fit;
  fit.intercept = 0.01;
  fit.slope = 0.998;
  fit.se_intercept = 0.05;
  fit.se_slope = 0.004;
  fit.cov = -0.0002;
  fit.analytic_se_intercept = 0.049;
  fit.analytic_se_slope = 0.0041;
  fit.intercept_interval = {-0.09, 0.11};
  fit.slope_interval = {0.99, 1.006};
  fit.identity_p = 0.7;
  fit.slope_at_lambda_low = 0.997;
  fit.slope_at_lambda_high = 0.999;
  view.fit = fit;
  view.levels = {{10.5, -0.01, 0.006, -0.02, 0.0, 0.2, Verdict::agreement_shown, "",
                  SingleResultView{0.98, -0.07, 0.05}},
                 {13.0, 0.02, 0.006, 0.01, 0.03, 0.2, Verdict::agreement_shown, "", {}}};
  DifferenceView difference;
  difference.mean = -0.01;
  difference.sd = 0.03;
  difference.within_count = 139;
  difference.within_of = 140;
  difference.within_interval = Interval{0.96, 1.0};
  difference.paired_t_p = 0.2;
  view.difference = difference;
  view.robust = RobustView{1.001, 0.02, Interval{0.99, 1.012}, {}};
  view.concordance = 0.998;
  DiagnosisView diagnosis;
  diagnosis.moved = Moved::y;
  diagnosis.probability = 0.97;
  diagnosis.probabilities = {0.0, 0.97, 0.02, 0.01};
  diagnosis.evidence = "line2 has moved.";
  diagnosis.shift_pairs = 0.13;
  diagnosis.shift_y = 0.12;
  diagnosis.started_at = at_hour(6);
  diagnosis.started_between = Period{at_hour(5), at_hour(7)};
  view.diagnosis = diagnosis;
  view.look_back = LookBackView{at_hour(4), at_hour(9), true, 2, {"S-105", "S-106"}, 5};
  view.scatter = ScatterView{0.028, 0.027, 1.08, 0.3, false};
  view.range = RangeView{0.999, true, true};
  view.pair_chart = {PairChartState::stable, 140, 0.8, 4.31, 4.83, 14600, false, {}, {}, {}};
  view.outliers = {{"S-104", at_hour(4), 4.1, 0.002}};
  for (int i = 0; i < 5; ++i)
    view.pairs.push_back({"S-10" + std::to_string(i), at_hour(i), 11.2, 11.21, 1, 1, 0.3, true, i == 4});
  return view;
}

inline Snapshot full_snapshot() {
  Snapshot snapshot = empty_snapshot();
  snapshot.started = snapshot.ready = true;
  snapshot.not_ready.clear();
  snapshot.totals = {3, 1, 0, 120, 2, 1, 1, 1, at_hour(9)};
  snapshot.pending_files = 2;
  snapshot.analyzers[0] = {{true, "", 2, true}, at_hour(9)};
  snapshot.analyzers[1] = {{false, "the folder is not there", 0, true}, {}};
  snapshot.charts[1] = std::make_shared<const ChartView>(full_chart());
  snapshot.chart_states[1] = ChartState::unstable;
  snapshot.comparisons[0] = std::make_shared<const ComparisonView>(full_comparison());
  snapshot.alerts_open = 1;
  snapshot.alerts_acknowledged = 1;
  snapshot.alerts_of_comparison = {{"protein", 1}};
  snapshot.chain = {7, std::string(64, 'a')};
  return snapshot;
}

/// Knows the open alert 17 and the resolved alert 18.
class FakeService : public Service {
 public:
  explicit FakeService(Snapshot first) { show(std::move(first)); }

  void show(Snapshot next) {
    const std::scoped_lock lock(mutex_);
    snapshot_ = std::make_shared<const Snapshot>(std::move(next));
  }
  [[nodiscard]] std::shared_ptr<const Snapshot> snapshot() const override {
    const std::scoped_lock lock(mutex_);
    return snapshot_;
  }
  [[nodiscard]] std::filesystem::path state() const override { return {}; }
  std::future<AskAnswer> acknowledge(std::int64_t alert, std::string by, std::string note) override {
    std::promise<AskAnswer> promise;
    if (hangs) {
      hanging.push_back(std::move(promise));
      return hanging.back().get_future();
    }
    if (down) {
      promise.set_value({AskOutcome::unavailable, "The disk is full."});
    } else if (alert == 17) {
      acknowledged_by = by;
      acknowledged_note = note;
      promise.set_value({});
    } else if (alert == 18) {
      promise.set_value({AskOutcome::not_possible, "Alert 18 is resolved already."});
    } else {
      promise.set_value({AskOutcome::not_found, "There is no alert " + std::to_string(alert) + "."});
    }
    return promise.get_future();
  }
  /// Knows msg_1, which can be sent again, and msg_2, which waits.
  std::future<AskAnswer> resend(std::string message) override {
    std::promise<AskAnswer> promise;
    if (down)
      promise.set_value({AskOutcome::unavailable, "The disk is full."});
    else if (message == "msg_1")
      promise.set_value({AskOutcome::done, "engineer"});
    else if (message == "msg_2")
      promise.set_value({AskOutcome::not_possible, "The message waits anyway."});
    else
      promise.set_value({AskOutcome::not_found, "There is no message " + message + "."});
    return promise.get_future();
  }

  /// Knows line1; noted at 06:00 is known already, at 07:00 too, told otherwise.
  std::future<AskAnswer> intervene(ToldIntervention told) override {
    std::promise<AskAnswer> promise;
    told_interventions.push_back(told);
    AskAnswer answer;
    answer.intervention = JournalIntervention{5,         told.analyzer, told.standard, told.measurand,
                                              told.kind, told.by,       told.note,     at_hour(6)};
    if (told.at == "2026-01-05T06:00:00Z") answer.outcome = AskOutcome::done_before;
    if (told.at == "2026-01-05T07:00:00Z") answer = {AskOutcome::not_possible, "Told otherwise."};
    if (told.analyzer != "line1") answer = {AskOutcome::not_usable, "is not known", "analyzer"};
    if (down) answer = {AskOutcome::unavailable, "The disk is full."};
    promise.set_value(std::move(answer));
    return promise.get_future();
  }

  bool down = false, hangs = false;
  std::vector<ToldIntervention> told_interventions;
  std::vector<std::promise<AskAnswer>> hanging;
  std::string acknowledged_by, acknowledged_note;

 private:
  mutable std::mutex mutex_;
  std::shared_ptr<const Snapshot> snapshot_;
};

}  // namespace agreed::test
