// The alarm budget of the configuration, and whether what follows from it makes sense.
#include <algorithm>
#include <cmath>
#include <limits>
#include <set>
#include <tuple>

#include "config/parts.hpp"
#include "config/value_text.hpp"
#include "core/base/budget_entries.hpp"
#include "core/chart/classical/expected_run_length.hpp"

namespace agreed::settings_file {
namespace {

constexpr double kUselessRunLength = 20;  // no limit that means anything has so short a run length

/// Charts of which the same was chosen have the same run length; where centre and sigma lie does not matter.
bool same_run_length(const ChartSettings& a, const ChartSettings& b) {
  const ClassicalSettings &x = a.classical, &y = b.classical;
  return a.baseline == b.baseline && x.center.has_value() == y.center.has_value() &&
         x.sigma.has_value() == y.sigma.has_value() &&
         x.sigma_degrees_of_freedom == y.sigma_degrees_of_freedom && x.ewma_weight == y.ewma_weight &&
         x.ewma_width == y.ewma_width && x.cusum_allowance == y.cusum_allowance &&
         x.cusum_limit == y.cusum_limit && x.run_rules == y.run_rules;
}

/// Works each combination out once: it takes up to half a second.
void find_run_lengths_of_limits(std::vector<ChartSettings>& charts) {
  for (std::size_t i = 0; i < charts.size(); ++i) {
    if (charts[i].method != ChartMethod::classical) continue;
    const auto same = [&](const ChartSettings& chart) {
      return chart.method == ChartMethod::classical && same_run_length(chart, charts[i]);
    };
    const auto known = std::find_if(charts.begin(), charts.begin() + static_cast<std::ptrdiff_t>(i), same);
    charts[i].expected = known != charts.begin() + static_cast<std::ptrdiff_t>(i)
                             ? known->expected
                             : classical::expected_run_length(charts[i].classical, charts[i].baseline);
  }
}

std::string about(double value) {
  return shown(std::round(value));
}

std::string cost_of(const ChartSettings& chart, double share) {
  const ExpectedRunLength& expected = chart.expected;
  const double a_year = 365.0 * 24 * 3'600'000 / static_cast<double>(chart.every.count()) / expected.readings;
  std::string text = "what was chosen for these classical charts has a false signal every about " +
                     about(expected.readings) + " readings";
  if (std::abs(expected.readings - expected.known_parameters) > 1)
    text += " (" + about(expected.known_parameters) + " if centre and sigma were known exactly)";
  return text + ", each chart about " + about(a_year) +
         " a year; its share of false_alerts_per_year is one every " + about(share) + " readings";
}

/// A classical chart keeps no promise of ours: what it costs is said.
void judge_limits(const ChartSettings& chart, const Section& charts) {
  std::string text;
  if (classical::all_run_rules(chart.classical.run_rules))
    text = "all run rules together with the limits: about " + about(chart.expected.limits_and_run_rules) +
           " readings between false signals; fewer rules find nearly as much";
  // The share is that of two scores, each with a run length of its own.
  const double share = chart.level_run_length / 2;
  if (chart.expected.readings < share / 2) text += (text.empty() ? "" : "; ") + cost_of(chart, share);
  if (!text.empty()) charts.warning("method", text);
}

void judge_all_limits(const Draft& draft) {
  std::set<std::tuple<int, int, double>> told;
  for (std::size_t i = 0; i < draft.settings.charts.size(); ++i) {
    const auto& charts = draft.chart_methods[i];
    if (!charts) continue;
    const Position at = charts->where("method");
    if (told.insert({at.line, at.column, draft.settings.charts[i].expected.readings}).second)
      judge_limits(draft.settings.charts[i], *charts);
  }
}

struct Shortest {
  double run_length = std::numeric_limits<double>::infinity();
  std::string whose;
  void offer(double length, const std::string& name) {
    if (!(length < run_length)) return;
    run_length = length;
    whose = name;
  }
};

/// Of those that live on a share.
Shortest shortest_share(const Draft& draft) {
  Shortest shortest;
  const Settings& all = draft.settings;
  for (std::size_t i = 0; i < all.charts.size(); ++i) {
    const ChartSettings& chart = all.charts[i];
    if (!chart.own_run_length && chart.method != ChartMethod::classical)
      shortest.offer(chart.level_run_length, "chart " + all.of(chart.analyzer).id + '/' +
                                                 all.of(chart.standard).id + '/' +
                                                 all.of(chart.measurand).id);
  }
  for (std::size_t i = 0; i < all.comparisons.size(); ++i)
    if (!all.comparisons[i].own_run_length)
      shortest.offer(all.comparisons[i].warning_run_length, "comparison " + all.comparisons[i].id);
  return shortest;
}

/// Three digits, rounded down: what is advised must be enough.
std::string rounded_down(double value) {
  const double unit = std::pow(10.0, std::floor(std::log10(value)) - 2);
  const double down = std::floor(value / unit) * unit;
  std::string text = shown(std::round(down * 1e6) / 1e6);
  return text;
}

void judge_shares(const Section& top, const BudgetShares& shares, const Draft& draft) {
  const Shortest shortest = shortest_share(draft);
  if (!(shortest.run_length < kShortRunLength)) return;
  const double enough = shares.taken_per_year + (shares.budget.allowed_per_year - shares.taken_per_year) *
                                                    shortest.run_length / kShortRunLength;
  const std::string found = "found " + shown(shares.budget.allowed_per_year) + ", by which " +
                            shortest.whose + " has a false alert every " +
                            shown(std::floor(shortest.run_length)) +
                            (shortest.whose.starts_with("chart") ? " readings" : " pairs");
  const std::string remedy = "; at least 1000 takes false_alerts_per_year: " + rounded_down(enough);
  if (shortest.run_length < kUselessRunLength)
    top.error("false_alerts_per_year", found + ", expected at least 20" + remedy);
  else
    top.warning("false_alerts_per_year", found + ": false alerts would have to be answered by hand" + remedy);
}

void check_scatter(const Section& comparison, const ComparisonSettings& settings) {
  // The scatter test is made once per renewal of the window at p = window pairs / run length.
  if (settings.scatter_run_length > settings.window_pairs) return;
  comparison.error("window",
                   "found room for " + std::to_string(settings.window_pairs) +
                       " pairs, expected fewer than the " + shown(std::floor(settings.scatter_run_length)) +
                       " pairs between false alerts of sample_scatter; a smaller false_alerts_per_year or "
                       "a longer in_control_run_length helps too");
}

}  // namespace

void spend_alarm_budget(const Section& top, bool judge, Draft& draft) {
  const double allowed = top.number("false_alerts_per_year").value_or(AlarmBudget{}.allowed_per_year);
  if (judge) find_run_lengths_of_limits(draft.settings.charts);
  const BudgetShares shares =
      share_alarm_budget(allowed, chart_entries(draft.settings), comparison_entries(draft.settings));
  apply_budget(shares, draft.settings);
  if (shares.overspent) {
    top.error("false_alerts_per_year",
              "found " + shown(allowed) + ", of which own in_control_run_length settings use up " +
                  shown(std::ceil(shares.taken_per_year * 100) / 100) +
                  " a year; expected some to be left: raise it, or raise or remove in_control_run_length");
  } else if (judge) {
    if (draft.settings.charts.empty() && draft.settings.comparisons.empty())
      top.warning_here("found neither check_standards nor comparisons; nothing is watched");
    judge_shares(top, shares, draft);
    judge_all_limits(draft);
    const auto sections = top.named("comparisons");
    for (std::size_t i = 0; i < sections.size(); ++i)
      check_scatter(sections[i], draft.settings.comparisons[i]);
  }
}

}  // namespace agreed::settings_file
