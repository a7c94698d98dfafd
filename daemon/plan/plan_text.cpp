#include "daemon/plan/plan_text.hpp"

#include <map>

#include <fmt/format.h>

#include "config/value_text.hpp"
#include "core/base/number_text.hpp"
#include "daemon/plan/plan_words.hpp"
#include "daemon/plan/wish_text.hpp"
#include "daemon/printable.hpp"

namespace agreed::plan {
namespace {

using settings_file::shown;

std::string in_unit(double value, const Measurand& measurand) {
  return significant(value, 3) + " " + measurand.unit;
}

std::string run_length_words(const std::optional<ScoreFalseAlerts>& score) {
  return score ? fixed(score->run_length, 0) + (score->extrapolated ? " (extrapolated)" : "") : "";
}

void show_head(Paper& paper, const Plan& plan, const Config& config) {
  paper.row("plan", printable(config.settings->site) + ", " + printable(config.file.string()));
  paper.row("seen", plan.seen.journal
                        ? "the journal in " + printable(config.state.string())
                        : "nothing: there is no journal in " + printable(config.state.string()));
  paper.row("simulated", fmt::format("{} times for each figure; +- is its standard error", plan.trials));
  paper.row(
      "assumed",
      fmt::format("errors are normal and independent, readings come every so often as configured; a step "
                  "comes after {} readings (of a comparison {} pairs) in control and lasts; the time "
                  "counts from a step just after a reading",
                  kReadingsBefore, kPairsBefore));
}

void show_false_alerts(Paper& paper, const Plan& plan, const Settings& settings) {
  paper.heading("False alerts a year");
  for (const auto& [kind, per_year] : plan.false_alerts.by_kind)
    paper.line(fmt::format("  {:<28}{}", kind, with_error(per_year)));
  const Simulated& all = plan.false_alerts.per_year;
  const std::string rate =
      all.value > 0 ? ", one in " + span_words(std::chrono::hours(24 * 365) / all.value) : std::string();
  paper.line(fmt::format("  {:<28}{}{}; allowed are {}", "all together", with_error(all), rate,
                         shown(settings.alarm_budget.allowed_per_year)));
}

std::string reached(const std::optional<Simulated>& figure, const StepWaits& step, Duration every) {
  if (!figure) return fmt::format("{:<15}{:<11}", fmt::format("over {}", step.horizon), "");
  return fmt::format("{:<15}{:<11}", with_error(*figure), span_words(figure->value, every));
}

void show_step(Paper& paper, const std::string& name, const StepWaits& step, Duration every) {
  std::string line = fmt::format("  {:<26}", name) + reached(step.half, step, every) +
                     reached(step.nine_in_ten, step, every);
  line.erase(line.find_last_not_of(' ') + 1);
  paper.line(line);
}

void show_table_head(Paper& paper, const std::string& what) {
  paper.line(fmt::format("  {:<26}{:<26}{}", "a step of", "half noticed by", "nine in ten by"));
  paper.line(fmt::format("  {:<26}{:<15}{:<11}{:<15}{}", "", what, "time", what, "time"));
}

std::string source_words(const ExpectedSd& sd) {
  switch (sd.source) {
    case Source::given:
      return " (given)";
    case Source::configured:
      return " (configured)";
    case Source::seen:
    case Source::unknown:
      break;
  }
  return "";
}

std::string chart_name(const Settings& settings, ChartIndex chart) {
  return name_of(settings, {chart, std::nullopt});
}

/// Of charts whose sd is not known: those that one --sd is for together.
void show_unknown(Paper& paper, const Plan& plan, const Settings& settings, const ChartLaw& law) {
  std::map<std::string, std::string> names;
  for (const ChartIndex index : law.charts) {
    if (plan.charts[index.value].sd.source != Source::unknown) continue;
    const ChartSettings& chart = settings.of(index);
    std::string& list = names[settings.of(chart.analyzer).id + "/" + settings.of(chart.measurand).id];
    list += (list.empty() ? "" : ", ") + chart_name(settings, index);
  }
  for (const auto& [give, list] : names)
    paper.row("  for", list + ": sd not known, too few readings seen; give --sd " + give + "=SD");
}

void show_chart(Paper& paper, const Plan& plan, const Settings& settings, ChartIndex index) {
  const ChartSettings& chart = settings.of(index);
  const ChartPlan& planned = plan.charts[index.value];
  const SeenChart& seen = plan.seen.charts[index.value];
  const Measurand& measurand = settings.of(chart.measurand);
  std::string text = chart_name(settings, index) + ": ";
  text += "sd " + in_unit(planned.sd.value, measurand) + source_words(planned.sd);
  if (planned.sd.source == Source::seen) text += fmt::format(", seen in {} readings", seen.readings);
  if (const auto& step = planned.allowable; step && step->half)
    text += fmt::format("; the allowable {} is {} sd: half noticed in {}", significant(*step->size, 3),
                        significant(step->in_sds, 3), span_words(step->half->value, chart.every));
  paper.row("  for", text);
  for (const std::string& warning : seen.warnings)
    if (warning == "heavy_tails" || warning == "serial_correlation")
      paper.row("", "warning " + warning + ": it calls out more often than stated here");
}

void show_law(Paper& paper, const Plan& plan, const Settings& settings, const ChartLaw& law) {
  const ChartIndex first = law.charts.front();
  const ChartSettings& chart = settings.of(first);
  const ChartFalseAlerts& calls = plan.false_alerts.charts.at(first.value);
  const std::string how =
      calls.classical ? "classical; a false alert in " + run_length_words(calls.limits) + " readings"
                      : "a false alert in " + run_length_words(calls.level) + " readings by level, in " +
                            run_length_words(calls.precision) + " by precision";
  paper.heading("Check standards, every " + shown(chart.every) + ": " + how);
  show_table_head(paper, "readings");
  for (const StepWaits& step : law.steps)
    show_step(paper, significant(step.in_sds, 3) + " sd", step, chart.every);
  for (const ChartIndex index : law.charts)
    if (plan.charts[index.value].sd.source != Source::unknown) show_chart(paper, plan, settings, index);
  show_unknown(paper, plan, settings, law);
}

void show_proof(Paper& paper, const ProofPlanned& proof, const ComparisonSettings& comparison,
                const Measurand& measurand) {
  const ProofNeeds& needs = proof.needs;
  const std::string bias = proof.bias_seen ? "with the bias seen, " + in_unit(proof.bias, measurand)
                                           : std::string("if there is no bias");
  std::string text;
  if (needs.pairs) {
    text = fmt::format("{} pairs ({}) show agreement with {} % power {}: {}", *needs.pairs,
                       span_words(*needs.pairs, comparison.every), kProofPower * 100, bias,
                       percent_with_error(needs.power));
    // One look at the bias alone would do with fewer: what is missing are samples on both sides of a level.
    constexpr double kWouldDo = 0.05;
    if (needs.closed_form > needs.power.value + kWouldDo)
      text += "; fewer would do if more samples lay beyond the decision levels";
  } else if (needs.reason == no_proof::bias_as_large_as_allowable) {
    text = "agreement cannot be shown " + bias + ": it is as large as what is allowable";
  } else if (needs.reason == no_proof::not_covered) {
    text = "agreement is seldom shown: too few samples reach the decision level" +
           (needs.level ? " " + shown(*needs.level) : std::string());
  } else {
    text =
        fmt::format("agreement is not shown with {} % power {}: the {} pairs that the window holds have {}",
                    kProofPower * 100, bias, needs.capacity, percent_with_error(needs.power));
    if (needs.pairs_in_larger_window)
      text += fmt::format("; it takes a window of {} pairs", *needs.pairs_in_larger_window);
    if (needs.sd_factor)
      text += fmt::format("; or {} times the present sd of both analyzers",
                          significant(rounded_down(*needs.sd_factor), 3));
    if (needs.allowable_factor)
      text += fmt::format("; or {} times the allowable difference",
                          significant(rounded_up(*needs.allowable_factor), 3));
  }
  paper.row("  proof", text);
}

void show_errors(Paper& paper, const ComparisonPlan& planned, const SeenComparison& seen,
                 const Settings& settings, const ComparisonSettings& comparison) {
  const Measurand& measurand = settings.of(comparison.measurand);
  if (!planned.pairs.conditions) {
    std::string give;
    for (const auto& [analyzer, sd] :
         {std::pair(comparison.x, &planned.pairs.x), std::pair(comparison.y, &planned.pairs.y)})
      if (sd->source == Source::unknown)
        give +=
            (give.empty() ? "--sd " : " and --sd ") + settings.of(analyzer).id + "/" + measurand.id + "=SD";
    paper.row("  errors", "not known (" + counted(seen.pairs, "pair", "pairs") + " seen): give " + give);
    return;
  }
  std::string text;
  for (const auto& [analyzer, sd] :
       {std::pair(comparison.x, &planned.pairs.x), std::pair(comparison.y, &planned.pairs.y)})
    text += settings.of(analyzer).id + " " + in_unit(sd->value, measurand) + source_words(*sd) + ", ";
  text += "y - x of a pair " + in_unit(*planned.sd_of_pair, measurand);
  if (planned.pairs.scatter_seen) text += fmt::format(" as {} pairs scatter", seen.pairs);
  if (!planned.pairs.samples_seen) text += "; samples assumed evenly around the decision levels";
  paper.row("  errors", text);
}

std::string comparison_alerts(const ComparisonFalseAlerts& calls) {
  std::string text = "in " + run_length_words(calls.warning) + " pairs by the pair chart";
  if (calls.outlier) text += ", in " + run_length_words(calls.outlier) + " by outliers";
  if (calls.scatter) text += ", in " + run_length_words(calls.scatter) + " by scatter";
  return text;
}

void show_comparison(Paper& paper, const Plan& plan, const Settings& settings, ComparisonIndex index) {
  const ComparisonSettings& comparison = settings.of(index);
  const ComparisonPlan& planned = plan.comparisons[index.value];
  const Measurand& measurand = settings.of(comparison.measurand);
  paper.heading("Comparison " + comparison.id + ", every " + shown(comparison.every) + ": a false alert " +
                comparison_alerts(plan.false_alerts.comparisons.at(index.value)));
  show_table_head(paper, "pairs");
  for (const StepWaits& step : planned.steps) {
    std::string name = significant(step.in_sds, 3) + " sd";
    if (step.allowable) name = "allowable";
    show_step(paper, name + (step.size ? ", " + in_unit(*step.size, measurand) : ""), step, comparison.every);
  }
  show_errors(paper, planned, plan.seen.comparisons[index.value], settings, comparison);
  for (const ProofPlanned& proof : planned.proofs) show_proof(paper, proof, comparison, measurand);
  if (planned.no_proof == no_proof::no_decision_levels)
    paper.row("  proof", "agreement is not judged: " + measurand.id + " has no decision_levels");
  else if (planned.no_proof == no_proof::no_allowable_difference)
    paper.row("  proof", "agreement is not judged: " + measurand.id + " has no allowable_difference");
}

}  // namespace

std::string plan_text(const Plan& plan, const Config& config) {
  const Settings& settings = *config.settings;
  Paper paper;
  show_head(paper, plan, config);
  show_false_alerts(paper, plan, settings);
  for (const ChartLaw& law : plan.laws) show_law(paper, plan, settings, law);
  for (std::uint32_t i = 0; i < plan.comparisons.size(); ++i) show_comparison(paper, plan, settings, {i});
  if (plan.budget) show_budget_wish(paper, *plan.budget, settings);
  if (plan.notice) show_notice_wish(paper, *plan.notice, plan.budget ? &*plan.budget : nullptr, settings);
  return paper.take();
}

}  // namespace agreed::plan
