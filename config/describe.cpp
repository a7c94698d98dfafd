#include "config/describe.hpp"

#include <algorithm>
#include <cmath>
#include <map>
#include <utility>
#include <vector>

#include "config/describe_format.hpp"
#include "config/describe_line.hpp"
#include "config/url.hpp"
#include "config/value_text.hpp"
#include "core/base/number_text.hpp"
#include "core/base/rfc3339.hpp"
#include "core/chart/run_length.hpp"
#include "core/pair/drift_alarm.hpp"

namespace agreed {
namespace {
using settings_file::shown;

std::string rounded(double value) {
  return fixed(value, 0);
}

/// "3650 readings, h = 4.08"
std::string run_length(double length, const char* of_what, Score score) {
  const ChangeLimit limit = limit_for(score, length);
  return rounded(length) + ' ' + of_what + ", h = " + fixed(limit.h, 2) +
         (limit.extrapolated ? " (extrapolated)" : "");
}

std::string cadence(Duration every, bool overdue) {
  return shown(every) + (overdue ? "" : " (assumed for the alarm budget, never called overdue)");
}

std::string service_text(const Config& config) {
  const Listen& listen = config.listen;
  const std::string port = listen.port == 0 ? "any free port" : "port " + std::to_string(listen.port);
  std::string text = config.settings->site + "\n";
  text += line("file", config.file.string());
  text += line("state", config.state.string());
  text +=
      line("listen", listen.address + ", " + port + (listen.open_to_network ? ", open to the network" : ""));
  if (config.page_url) text += line("page_url", *config.page_url);
  text +=
      line("tokens_file", config.tokens_file ? config.tokens_file->string() : "none: every POST is refused");
  return text;
}

std::string analyzers_text(const Config& config) {
  std::string text = "\nAnalyzers\n";
  for (std::size_t i = 0; i < config.intake.size(); ++i) {
    const IntakeSettings& intake = config.intake[i];
    const std::string& title = config.settings->analyzers.at(i).title;
    text += line(intake.analyzer, title == intake.analyzer ? "" : title);
    text += line("  inbox", intake.inbox.string());
    text += line("  format",
                 intake.format + ", zone " + intake.zone + ", not before " + to_rfc3339(intake.not_before));
    text += line("  settle, rescan", shown(intake.settle) + ", " + shown(intake.rescan));
    text += line("  on_bad_row", intake.on_bad_row == BadRowPolicy::keep_good ? "keep_good" : "reject_file");
  }
  return text;
}

/// By format, so that one which several analyzers use is shown once.
std::string formats_text(const Config& config) {
  std::map<std::string, std::pair<const MappedFormat*, std::vector<std::string>>> formats;
  for (const IntakeSettings& intake : config.intake) {
    if (!intake.mapped) continue;
    auto& [format, analyzers] = formats[intake.mapped->id];
    format = intake.mapped.get();
    analyzers.push_back(intake.analyzer);
  }
  std::string text = formats.empty() ? "" : "\nFormats\n";
  for (const auto& [id, format] : formats) text += describe_format(*format.first, list_of(format.second));
  return text;
}

std::string measurands_text(const Settings& settings) {
  std::string text = "\nMeasurands\n";
  for (const Measurand& measurand : settings.measurands) {
    std::vector<std::string> levels, allowable;
    for (const double level : measurand.decision_levels)
      levels.push_back(shown(level) +
                       (measurand.allowable ? " (+-" + shown(measurand.allowable->at(level)) + ")" : ""));
    text += line(measurand.id, "in " + measurand.unit);
    text += line("  decision_levels",
                 levels.empty() ? "none: no verdict"
                                : list_of(levels) +
                                      (measurand.allowable ? "" : ", no allowable_difference: no verdict"));
  }
  return text;
}

std::string lots_text(const std::vector<Lot>& lots) {
  std::vector<std::string> words;
  for (const Lot& lot : lots) {
    std::string word = lot.id;
    if (lot.from) word += " from " + to_rfc3339(*lot.from);
    if (lot.reference) word += " (reference " + shown(lot.reference->value) + ")";
    words.push_back(word);
  }
  return list_of(words);
}

std::string classical_text(const ChartSettings& chart) {
  const ClassicalSettings& chosen = chart.classical;
  std::string text = "limits of 3 sd";
  if (chosen.center) text += ", center " + shown(*chosen.center);
  if (chosen.sigma) text += ", sigma " + shown(*chosen.sigma);
  if (chosen.ewma_weight && chosen.ewma_width)
    text += ", ewma " + shown(*chosen.ewma_weight) + '/' + shown(*chosen.ewma_width);
  if (chosen.cusum_allowance && chosen.cusum_limit)
    text += ", cusum " + shown(*chosen.cusum_allowance) + '/' + shown(*chosen.cusum_limit);
  if (!(chosen.run_rules == RunRules{})) text += ", run rules";
  return text + "; a false signal every about " + shown(std::round(chart.expected.readings)) + " readings";
}

std::string charts_text(const Settings& settings) {
  std::string text = "\nCharts\n";
  for (const ChartSettings& chart : settings.charts) {
    text += line(settings.of(chart.analyzer).id + '/' + settings.of(chart.standard).id + '/' +
                     settings.of(chart.measurand).id,
                 "");
    text += line("  lots", lots_text(chart.lots));
    text += line("  every", cadence(chart.every, chart.overdue));
    if (chart.method == ChartMethod::classical)
      text += line("  classical", classical_text(chart));
    else
      text += line("  level", run_length(chart.level_run_length, "readings", Score::level));
    if (chart.method != ChartMethod::classical)
      text += line("  precision", run_length(chart.precision_run_length, "readings", Score::precision));
    text += line("  baseline", std::to_string(chart.baseline) + " readings; split_memory " +
                                   std::to_string(chart.split_memory) + ", clear_after " +
                                   std::to_string(chart.clear_after));
    if (chart.smallest_shift) text += line("  smallest_shift", shown(*chart.smallest_shift));
  }
  return text;
}

std::string error_ratio_text(const ErrorRatioSettings& ratio) {
  switch (ratio.source) {
    case ErrorSource::check_standards:
      return "from the check standards";
    case ErrorSource::replicates:
      return "from the replicates of the split samples";
    case ErrorSource::given_sds:
      return "sd_x " + shown(ratio.sd_x) + ", sd_y " + shown(ratio.sd_y);
    case ErrorSource::given_lambda:
      return "lambda = var(x error)/var(y error) = " + shown(ratio.lambda) + ", to a factor of 2";
  }
  return "";
}

std::string fit_text(const ComparisonSettings& comparison) {
  std::string fit = comparison.fit == FitMethod::deming ? "deming" : "weighted_deming";
  switch (comparison.error_growth) {
    case ErrorGrowth::constant:
      return fit + ", errors constant";
    case ErrorGrowth::proportional:
      return fit + ", errors proportional to the level";
    case ErrorGrowth::mixed:
      return fit + ", errors with a constant and a proportional part";
  }
  return fit;
}

std::string comparison_text(const Settings& settings, const ComparisonSettings& comparison) {
  const std::string age =
      comparison.window_age ? "none older than " + shown(*comparison.window_age) : "of any age";
  std::string text =
      line(comparison.id, settings.of(comparison.measurand).id + ": x = " + settings.of(comparison.x).id +
                              ", y = " + settings.of(comparison.y).id);
  text += line("  window", std::to_string(comparison.window_pairs) + " pairs, " + age);
  text += line("  error_ratio", error_ratio_text(comparison.error_ratio));
  text += line("  fit", fit_text(comparison));
  text += line("  verdict", "from " + std::to_string(comparison.least_pairs) + " pairs, moves after " +
                                std::to_string(comparison.confirm) + " in a row");
  text += line("  confidence",
               shown(comparison.confidence) + ", of alerts " + shown(comparison.alert_confidence));
  text += line("  every", cadence(comparison.every, comparison.overdue));
  text += line("  pair_within", shown(comparison.pair_within));
  text +=
      line("  pair chart, warning", run_length(comparison.warning_run_length, "pairs", score_of(comparison)));
  text += line("  pair chart, critical",
               run_length(10 * comparison.warning_run_length, "pairs", score_of(comparison)));
  if (comparison.relation)
    text += line("  relation", "y = " + shown(comparison.relation->intercept) + " + " +
                                   shown(comparison.relation->slope) + " x, established");
  text += line("  outliers", std::string(comparison.set_outliers_aside ? "set_aside" : "keep") +
                                 ", a false one every " + rounded(comparison.outlier_run_length) + " pairs");
  text +=
      line("  sample scatter", "a false alert every " + rounded(comparison.scatter_run_length) + " pairs");
  if (comparison.prove_within) text += line("  prove_within", shown(*comparison.prove_within));
  return text;
}

std::string budget_text(const AlarmBudget& budget) {
  std::string text = "\nAlarm budget\n";
  text += line("allowed", shown(budget.allowed_per_year) + " false alerts a year");
  text += line("expected", fixed(budget.expected_per_year, 2) + " a year");
  for (const auto& [kind, per_year] : budget.by_kind) text += line("  " + kind, fixed(per_year, 2));
  return text;
}

std::string secret_text(const Route& route) {
  if (route.secret_file) return "signed, secret from file " + route.secret_file->string();
  if (route.secret_env) return "signed, secret from the environment";
  return "unsigned";
}

std::string route_text(const Route& route) {
  const auto parts = settings_file::url_parts(route.url);
  std::string text = line(route.name, parts ? parts->origin : "");
  text += line("  signature", secret_text(route));
  std::vector<std::string> kinds;
  for (const AlertKind kind : route.kinds) kinds.emplace_back(to_string(kind));
  text += line("  kinds", kinds.empty() ? "all" : list_of(kinds));
  text += line("  at_least", to_string(route.at_least));
  if (!route.analyzers.empty()) text += line("  analyzers", list_of(route.analyzers));
  if (!route.measurands.empty()) text += line("  measurands", list_of(route.measurands));
  if (!route.comparisons.empty()) text += line("  comparisons", list_of(route.comparisons));
  if (route.unacknowledged_for) text += line("  unacknowledged_for", shown(*route.unacknowledged_for));
  if (route.heartbeat) text += line("  heartbeat", shown(*route.heartbeat));
  if (route.ca_file) text += line("  ca_file", route.ca_file->string());
  return text;
}

std::string alerts_text(const Config& config) {
  std::string text = "\nAlerts\n";
  text += line("remind_every", shown(config.alert_policy.remind_every));
  text += line("reopen_within", shown(config.alert_policy.reopen_within));
  text += line("hold", shown(config.alert_policy.hold));
  text += line("overdue_after", shown(config.alert_policy.overdue.patience) + " times the cadence");
  if (config.routes.empty()) text += line("routes", "none: nothing is sent");
  for (const Route& route : config.routes) text += route_text(route);
  return text;
}

std::string without_trailing_spaces(const std::string& text) {
  std::string result;
  for (const char c : text) {
    if (c == '\n') result.erase(result.find_last_not_of(' ') + 1);
    result += c;
  }
  return result;
}

}  // namespace

std::string describe(const Config& config) {
  const Settings& settings = *config.settings;
  std::string text =
      service_text(config) + analyzers_text(config) + formats_text(config) + measurands_text(settings);
  if (!settings.charts.empty()) text += charts_text(settings);
  if (!settings.comparisons.empty()) text += "\nComparisons\n";
  for (const ComparisonSettings& comparison : settings.comparisons)
    text += comparison_text(settings, comparison);
  return without_trailing_spaces(text + budget_text(settings.alarm_budget) + alerts_text(config));
}

}  // namespace agreed
