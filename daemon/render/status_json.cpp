#include "daemon/render/status_json.hpp"

#include <algorithm>
#include <cmath>

#include "daemon/printable.hpp"
#include "daemon/render/json_parts.hpp"
#include "daemon/version.hpp"

namespace agreed {
namespace {

/// `prove_within` is counted in measured_at, so the newest pair of the window says how late it is.
bool needs_attention(const ComparisonView& view, const ComparisonSettings& settings) {
  if (view.verdict == Verdict::gathering) return true;
  return view.verdict == Verdict::inconclusive && settings.prove_within && view.verdict_since &&
         view.window.to && *view.window.to - *view.verdict_since > *settings.prove_within;
}

Json service_of(const Snapshot& snapshot) {
  return {{"version", version()},
          {"started_at", to_rfc3339(snapshot.started_at)},
          {"uptime_s", std::chrono::floor<std::chrono::seconds>(snapshot.at - snapshot.started_at).count()},
          {"config_sha256", snapshot.config_sha256},
          {"config_since", json_time(snapshot.config_since)},
          {"ready", snapshot.ready}};
}

Json intake_of(const Snapshot& snapshot) {
  const IntakeTotals& totals = snapshot.totals;
  return {{"pending_files", snapshot.pending_files},
          {"files",
           {{"done", totals.files_done},
            {"repeated", totals.files_repeated},
            {"rejected", totals.files_rejected}}},
          {"readings",
           {{"accepted", totals.readings_accepted},
            {"repeated", totals.readings_repeated},
            {"rejected", totals.readings_rejected},
            {"voided", totals.readings_voided},
            {"censored", totals.readings_censored}}},
          {"last_commit_at", json_time(totals.last_commit_at)}};
}

/// Charts of one analyzer by state; a chart that has no view yet is still learning.
Json chart_counts(const Snapshot& snapshot, AnalyzerIndex analyzer) {
  int stable = 0, unstable = 0, learning = 0;
  for (std::size_t i = 0; i < snapshot.settings->charts.size(); ++i) {
    if (snapshot.settings->charts[i].analyzer != analyzer) continue;
    switch (i < snapshot.chart_states.size() ? snapshot.chart_states[i] : ChartState::learning) {
      case ChartState::stable:
        ++stable;
        break;
      case ChartState::unstable:
        ++unstable;
        break;
      case ChartState::learning:
        ++learning;
        break;
    }
  }
  return {{"stable", stable}, {"unstable", unstable}, {"learning", learning}};
}

Json growing_of(const InboxState& inbox) {
  Json list = Json::array();
  for (const GrowingState& file : inbox.growing)
    list.push_back(
        {{"file", printable(file.name)}, {"taken_bytes", file.taken}, {"unfinished_bytes", file.unfinished}});
  return list;
}

Json analyzers_of(const Snapshot& snapshot) {
  Json list = Json::array();
  for (std::uint32_t i = 0; i < snapshot.settings->analyzers.size(); ++i) {
    const Analyzer& analyzer = snapshot.settings->analyzers[i];
    const AnalyzerStatus status = i < snapshot.analyzers.size() ? snapshot.analyzers[i] : AnalyzerStatus{};
    list.push_back({{"id", analyzer.id},
                    {"title", analyzer.title},
                    {"inbox",
                     {{"reachable", status.inbox.reachable},
                      {"reason", json_words(status.inbox.reason)},
                      {"since", json_time(status.inbox.unreachable_since)},
                      {"pending", status.inbox.pending},
                      {"growing", growing_of(status.inbox)}}},
                    {"last_reading_at", json_time(status.last_reading_at)},
                    {"charts", chart_counts(snapshot, AnalyzerIndex{i})}});
  }
  return list;
}

/// The decision level whose bias uses most of what is allowable there; null when no level has both.
Json largest_bias(const ComparisonView& view) {
  const LevelView* largest = nullptr;
  double share = -1;
  for (const LevelView& level : view.levels) {
    if (!level.bias || !level.allowable || !(*level.allowable > 0)) continue;
    const double here = std::abs(*level.bias) / *level.allowable;
    if (!(here > share)) continue;
    share = here;
    largest = &level;
  }
  if (!largest) return nullptr;
  return {{"level", json_number(largest->level)},
          {"bias", json_number(largest->bias)},
          {"allowable", json_number(largest->allowable)}};
}

Json comparisons_of(const Snapshot& snapshot) {
  static const ComparisonView kNothing;
  const Settings& settings = *snapshot.settings;
  Json list = Json::array();
  for (std::size_t i = 0; i < settings.comparisons.size(); ++i) {
    const ComparisonSettings& comparison = settings.comparisons[i];
    const bool known = i < snapshot.comparisons.size() && snapshot.comparisons[i];
    const ComparisonView& view = known ? *snapshot.comparisons[i] : kNothing;
    const auto alerts = snapshot.alerts_of_comparison.find(comparison.id);
    list.push_back({{"id", comparison.id},
                    {"measurand", settings.of(comparison.measurand).id},
                    {"x", settings.of(comparison.x).id},
                    {"y", settings.of(comparison.y).id},
                    {"verdict", to_string(view.verdict)},
                    {"verdict_since", json_time(view.verdict_since)},
                    {"verdict_reason", json_words(view.verdict_reason)},
                    {"agreement_lost_at", json_time(view.agreement_lost)},
                    {"pairs", view.window.pairs},
                    {"largest_bias", largest_bias(view)},
                    {"alerts", alerts == snapshot.alerts_of_comparison.end() ? 0 : alerts->second}});
  }
  return list;
}

// 3-statistics 3.4 and 3.2: what is not shared out, since it does not come back year by year.
constexpr double kLostAtTheEdge = 0.06, kLostAtTheEdgeOfSmallWindows = 0.19, kBiasedStandards = 0.04;
constexpr int kLargeWindow = 200;

/// Alerts outside the yearly number, each with the share of its subjects that it may call falsely.
Json stated_apart(const Settings& settings) {
  int comparisons = 0, charts = 0;
  bool large_windows = true;
  for (const ComparisonSettings& comparison : settings.comparisons) {
    const Measurand& measurand = settings.of(comparison.measurand);
    if (measurand.decision_levels.empty() || !measurand.allowable) continue;
    ++comparisons;
    large_windows = large_windows && comparison.window_pairs >= kLargeWindow;
  }
  for (const ChartSettings& chart : settings.charts)
    charts += std::any_of(chart.lots.begin(), chart.lots.end(), [](const Lot& lot) { return lot.reference; });
  Json apart = Json::object();
  if (comparisons > 0)
    apart["agreement_lost"] = {
        {"subjects", comparisons},
        {"share_at_most", large_windows ? kLostAtTheEdge : kLostAtTheEdgeOfSmallWindows},
        {"of",
         "comparisons whose bias is exactly the allowable difference, within 1,000 pairs; far fewer below"}};
  if (charts > 0)
    apart["check_standard_biased"] = {{"subjects", charts},
                                      {"share_at_most", kBiasedStandards},
                                      {"of", "charts with a reference value, once for good"}};
  return apart;
}

Json chain_of(const ChainHead& head) {
  return {{"sequence", head.sequence}, {"sha256", head.sha256}};
}

// Shares that were added up leave 4.799999999999999 where 4.8 is meant.
double without_noise(double per_year) {
  return std::round(per_year * 1e9) / 1e9;
}

Json budget_of(const Settings& settings) {
  const AlarmBudget& budget = settings.alarm_budget;
  Json by_kind = Json::object();
  for (const auto& [kind, expected] : budget.by_kind) by_kind[kind] = json_number(without_noise(expected));
  return {{"false_alerts_per_year", json_number(budget.allowed_per_year)},
          {"expected", json_number(without_noise(budget.expected_per_year))},
          {"by_kind", std::move(by_kind)},
          {"apart", stated_apart(settings)}};
}

}  // namespace

std::string chain_json(const ChainHead& head) {
  return json_text(chain_of(head));
}

const char* overall(const Snapshot& snapshot) {
  if (!snapshot.started) return "starting";
  bool attention = !snapshot.ready || snapshot.alerts_open > 0;
  bool alert = snapshot.alerts_critical > 0;
  for (std::size_t i = 0; i < snapshot.comparisons.size(); ++i) {
    if (!snapshot.comparisons[i]) continue;
    const ComparisonView& view = *snapshot.comparisons[i];
    alert = alert || view.verdict == Verdict::disagreement_shown || view.agreement_lost;
    attention = attention || needs_attention(view, snapshot.settings->comparisons.at(i));
  }
  if (alert) return "alert";
  return attention ? "attention" : "ok";
}

std::string status_json(const Snapshot& snapshot) {
  const Json status = {
      {"site", snapshot.settings->site},
      {"service", service_of(snapshot)},
      {"at", to_rfc3339(snapshot.at)},
      {"overall", overall(snapshot)},
      {"intake", intake_of(snapshot)},
      {"analyzers", analyzers_of(snapshot)},
      {"comparisons", comparisons_of(snapshot)},
      {"alerts", {{"open", snapshot.alerts_open}, {"acknowledged", snapshot.alerts_acknowledged}}},
      {"alarm_budget", budget_of(*snapshot.settings)},
      {"chain", chain_of(snapshot.chain)}};
  return json_text(status);
}

}  // namespace agreed
