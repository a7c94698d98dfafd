#include "daemon/render/metrics_text.hpp"

#include <algorithm>
#include <array>
#include <map>
#include <tuple>

#include "core/base/number_text.hpp"
#include "daemon/render/open_metrics.hpp"
#include "daemon/render/status_json.hpp"
#include "daemon/version.hpp"

namespace agreed {
namespace {

using enum MetricType;
using Labels = OpenMetrics::Labels;

constexpr std::array<std::string_view, 4> kOverall = {"ok", "attention", "alert", "starting"};
constexpr std::array<std::string_view, 4> kVerdicts = {"gathering", "agreement_shown", "inconclusive",
                                                       "disagreement_shown"};
constexpr std::array<std::string_view, 3> kMessageStates = {"waiting", "delivered", "undeliverable"};
constexpr std::array<ChartState, 3> kChartStates = {ChartState::learning, ChartState::stable,
                                                    ChartState::unstable};
constexpr std::array<AlertState, 2> kCurrent = {AlertState::open, AlertState::acknowledged};
constexpr std::array<Severity, 3> kSeverities = {Severity::notice, Severity::warning, Severity::critical};

double seconds(Instant at) {
  return static_cast<double>(at.time_since_epoch().count()) / 1000.0;
}
std::optional<double> seconds(const std::optional<Instant>& at) {
  return at ? std::optional(seconds(*at)) : std::nullopt;
}
double count(std::integral auto number) {
  return static_cast<double>(number);
}

void tell_service(OpenMetrics& out, const Snapshot& snapshot) {
  out.begin({"agreed_build", info, "", "The program that answers."});
  out.info({{"version", version()}});
  out.begin({"agreed_configuration", info, "", "The configuration in force."});
  out.info({{"site", snapshot.settings->site}, {"sha256", snapshot.config_sha256}});
  out.begin({"agreed_start_time_seconds", gauge, "seconds", "When the service was started."});
  out.sample({}, seconds(snapshot.started_at));
  out.begin({"agreed_snapshot_time_seconds", gauge, "seconds",
             "When the numbers below were taken: after each batch and each scan of an inbox."});
  out.sample({}, seconds(snapshot.at));
  out.begin({"agreed_ready", gauge, "", "1 if results can be taken in, as /health/ready says."});
  out.sample({}, snapshot.ready ? 1 : 0);
  out.begin({"agreed_overall", state_set, "", "The whole picture in one word, as /api/status gives it."});
  out.states({}, kOverall, overall(snapshot));
}

void tell_intake(OpenMetrics& out, const Snapshot& snapshot) {
  const IntakeTotals& totals = snapshot.totals;
  out.begin({"agreed_intake_files", counter, "files",
             "Files that came since the journal began, by outcome; exports that grow are not among them."});
  out.sample({{"outcome", "done"}}, count(totals.files_done));
  out.sample({{"outcome", "repeated"}}, count(totals.files_repeated));
  out.sample({{"outcome", "rejected"}}, count(totals.files_rejected));
  out.begin(
      {"agreed_intake_readings", counter, "readings", "Rows that came since the journal began, by outcome."});
  out.sample({{"outcome", "accepted"}}, count(totals.readings_accepted));
  out.sample({{"outcome", "repeated"}}, count(totals.readings_repeated));
  out.sample({{"outcome", "rejected"}}, count(totals.readings_rejected));
  out.begin({"agreed_intake_readings_voided", counter, "", "Accepted readings that were taken back later."});
  out.sample({}, count(totals.readings_voided));
  out.begin(
      {"agreed_intake_readings_censored", counter, "", "Accepted readings that only say below or above."});
  out.sample({}, count(totals.readings_censored));
  out.begin({"agreed_intake_pending_files", gauge, "files", "Files noticed and not yet committed."});
  out.sample({}, count(snapshot.pending_files));
  out.begin({"agreed_intake_last_commit_time_seconds", gauge, "seconds",
             "When something dropped was last committed to the journal."});
  out.sample({}, seconds(totals.last_commit_at));
}

/// `tell(labels of the analyzer, its status)` for each analyzer.
template <class Tell>
void each_analyzer(const Snapshot& snapshot, const Tell& tell) {
  for (std::size_t i = 0; i < snapshot.settings->analyzers.size(); ++i)
    tell(Labels{{"analyzer", snapshot.settings->analyzers[i].id}},
         i < snapshot.analyzers.size() ? snapshot.analyzers[i] : AnalyzerStatus{});
}

void tell_charts(OpenMetrics& out, const Snapshot& snapshot) {
  const Settings& settings = *snapshot.settings;
  std::map<std::pair<std::uint32_t, ChartState>, int> charts;
  for (std::size_t i = 0; i < settings.charts.size(); ++i)
    ++charts[{settings.charts[i].analyzer.value,
              i < snapshot.chart_states.size() ? snapshot.chart_states[i] : ChartState::learning}];
  out.begin({"agreed_analyzer_charts", gauge, "charts", "Control charts of an analyzer, by state."});
  for (std::uint32_t i = 0; i < settings.analyzers.size(); ++i)
    for (const ChartState state : kChartStates)
      out.sample({{"analyzer", settings.analyzers[i].id}, {"state", to_string(state)}}, charts[{i, state}]);
}

void tell_analyzers(OpenMetrics& out, const Snapshot& snapshot) {
  out.begin({"agreed_analyzer", info, "", "The analyzers of the configuration."});
  for (const Analyzer& analyzer : snapshot.settings->analyzers)
    out.info({{"analyzer", analyzer.id}, {"title", analyzer.title}});
  out.begin({"agreed_inbox_reachable", gauge, "", "1 if the analyzer's inbox can be listed."});
  each_analyzer(snapshot, [&](const Labels& labels, const AnalyzerStatus& status) {
    out.sample(labels, status.inbox.reachable ? 1 : 0);
  });
  out.begin(
      {"agreed_inbox_pending_files", gauge, "files", "Files of the analyzer noticed and not yet committed."});
  each_analyzer(snapshot, [&](const Labels& labels, const AnalyzerStatus& status) {
    out.sample(labels, count(status.inbox.pending));
  });
  out.begin({"agreed_analyzer_last_reading_time_seconds", gauge, "seconds",
             "measured_at of the analyzer's newest accepted reading."});
  each_analyzer(snapshot, [&](const Labels& labels, const AnalyzerStatus& status) {
    out.sample(labels, seconds(status.last_reading_at));
  });
  tell_charts(out, snapshot);
}

/// `tell(id, view)` for each comparison; one without a view yet has an empty one.
template <class Tell>
void each_comparison(const Snapshot& snapshot, const Tell& tell) {
  static const ComparisonView kNothing;
  const auto& comparisons = snapshot.settings->comparisons;
  for (std::size_t i = 0; i < comparisons.size(); ++i) {
    const bool known = i < snapshot.comparisons.size() && snapshot.comparisons[i];
    tell(comparisons[i].id, known ? *snapshot.comparisons[i] : kNothing);
  }
}

void tell_level(OpenMetrics& out, const Snapshot& snapshot, const MetricFamily& family,
                std::optional<double> LevelView::*what) {
  out.begin(family);
  each_comparison(snapshot, [&](const std::string& id, const ComparisonView& view) {
    for (const LevelView& level : view.levels)
      out.sample({{"comparison", id}, {"level", exact(level.level)}}, level.*what);
  });
}

void tell_levels(OpenMetrics& out, const Snapshot& snapshot) {
  tell_level(out, snapshot,
             {"agreed_comparison_bias", gauge, "",
              "Estimated bias of y against x at a decision level, in the measurand's unit."},
             &LevelView::bias);
  tell_level(out, snapshot,
             {"agreed_comparison_bias_low", gauge, "", "Lower end of the 90 % interval of the bias."},
             &LevelView::low);
  tell_level(out, snapshot,
             {"agreed_comparison_bias_high", gauge, "", "Upper end of the 90 % interval of the bias."},
             &LevelView::high);
  tell_level(out, snapshot,
             {"agreed_comparison_allowable_difference", gauge, "",
              "The largest difference that does no harm at a decision level, in the measurand's unit."},
             &LevelView::allowable);
}

void tell_comparisons(OpenMetrics& out, const Snapshot& snapshot) {
  const Settings& settings = *snapshot.settings;
  out.begin({"agreed_comparison", info, "", "What is compared, and the unit of its differences."});
  for (const ComparisonSettings& comparison : settings.comparisons)
    out.info({{"comparison", comparison.id},
              {"measurand", settings.of(comparison.measurand).id},
              {"unit", settings.of(comparison.measurand).unit},
              {"x", settings.of(comparison.x).id},
              {"y", settings.of(comparison.y).id}});
  out.begin({"agreed_comparison_verdict", state_set, "", "Whether the two analyzers agree."});
  each_comparison(snapshot, [&](const std::string& id, const ComparisonView& view) {
    out.states({{"comparison", id}}, kVerdicts, to_string(view.verdict));
  });
  out.begin({"agreed_comparison_verdict_since_time_seconds", gauge, "seconds",
             "measured_at of the pair that brought the verdict."});
  each_comparison(snapshot, [&](const std::string& id, const ComparisonView& view) {
    out.sample({{"comparison", id}}, seconds(view.verdict_since));
  });
  out.begin({"agreed_comparison_window_pairs", gauge, "pairs", "Pairs in the window of the fit."});
  each_comparison(snapshot, [&](const std::string& id, const ComparisonView& view) {
    out.sample({{"comparison", id}}, view.window.pairs);
  });
  tell_levels(out, snapshot);
}

void tell_alerts(OpenMetrics& out, const Snapshot& snapshot) {
  std::map<std::tuple<AlertKind, Severity, AlertState>, int> alerts;
  for (const SharedAlert& alert : snapshot.alerts) ++alerts[{alert->kind, alert->severity, alert->state}];
  out.begin({"agreed_alerts", gauge, "", "Alerts that are not resolved, by kind, severity and state."});
  for (const AlertKind kind : all_alert_kinds())
    for (const Severity severity : kSeverities)
      for (const AlertState state : kCurrent)
        out.sample(
            {{"kind", to_string(kind)}, {"severity", to_string(severity)}, {"state", to_string(state)}},
            alerts[{kind, severity, state}]);
}

void tell_messages(OpenMetrics& out, const Snapshot& snapshot, const std::vector<MessageCount>& messages) {
  std::map<std::pair<std::string, std::string>, std::int64_t> counts;
  const auto expect = [&](const std::string& route) {
    for (const std::string_view state : kMessageStates) counts.try_emplace({route, std::string(state)}, 0);
  };
  for (const std::string& route : snapshot.routes) expect(route);
  for (const MessageCount& some : messages) {
    expect(some.route);
    counts[{some.route, some.state}] = some.messages;
  }
  out.begin(
      {"agreed_messages", gauge, "", "Messages of a route, also of one no longer configured, by state."});
  for (const auto& [of, number] : counts)
    out.sample({{"route", of.first}, {"state", of.second}}, count(number));
}

void tell_budget(OpenMetrics& out, const Snapshot& snapshot) {
  const AlarmBudget& budget = snapshot.settings->alarm_budget;
  out.begin({"agreed_alarm_budget_alerts_per_year", gauge, "", "False alerts a year that were allowed."});
  out.sample({}, budget.allowed_per_year);
  out.begin({"agreed_alarm_budget_expected_alerts_per_year", gauge, "",
             "False alerts a year to be expected while nothing is wrong, by kind."});
  for (const auto& [kind, expected] : budget.by_kind) out.sample({{"kind", kind}}, expected);
}

}  // namespace

std::string metrics_text(const Snapshot& snapshot, const std::optional<std::vector<MessageCount>>& messages) {
  OpenMetrics out;
  tell_service(out, snapshot);
  tell_intake(out, snapshot);
  tell_analyzers(out, snapshot);
  tell_comparisons(out, snapshot);
  tell_alerts(out, snapshot);
  if (messages) tell_messages(out, snapshot, *messages);
  out.begin({"agreed_chain_sequence", gauge, "", "Batches in the journal's chain: its head."});
  out.sample({}, count(snapshot.chain.sequence));
  tell_budget(out, snapshot);
  return out.text();
}

}  // namespace agreed
