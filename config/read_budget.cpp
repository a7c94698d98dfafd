// The alarm budget of the configuration, and whether what follows from it makes sense.
#include <algorithm>
#include <cmath>
#include <limits>

#include "config/parts.hpp"
#include "config/value_text.hpp"
#include "core/base/alarm_budget.hpp"

namespace agreed::settings_file {
namespace {

constexpr double kUselessRunLength = 20;  // no limit that means anything has so short a run length

template <class Item>
std::vector<BudgetEntry> entries_of(const std::vector<Item>& items,
                                    const std::vector<std::optional<double>>& own) {
  std::vector<BudgetEntry> entries;
  for (std::size_t i = 0; i < items.size(); ++i) entries.push_back({items[i].every, own.at(i)});
  return entries;
}

std::vector<BudgetEntry> comparison_entries(const Draft& draft) {
  auto entries = entries_of(draft.settings.comparisons, draft.comparison_run_lengths);
  for (std::size_t i = 0; i < entries.size(); ++i) {
    const ComparisonSettings& comparison = draft.settings.comparisons[i];
    entries[i].tests_outliers = comparison.set_outliers_aside;
    // A bare lambda says nothing of the size of the errors, so scatter cannot be held against it.
    entries[i].tests_scatter = comparison.error_ratio.source != ErrorSource::given_lambda;
  }
  return entries;
}

void put_into(Settings& settings, const BudgetShares& shares) {
  settings.alarm_budget = shares.budget;
  for (std::size_t i = 0; i < settings.charts.size(); ++i) {
    settings.charts[i].level_run_length = shares.charts[i].level;
    settings.charts[i].precision_run_length = shares.charts[i].precision;
  }
  for (std::size_t i = 0; i < settings.comparisons.size(); ++i) {
    settings.comparisons[i].warning_run_length = shares.comparisons[i].warning;
    settings.comparisons[i].outlier_run_length = shares.comparisons[i].outlier;
    settings.comparisons[i].scatter_run_length = shares.comparisons[i].scatter;
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
    if (!draft.chart_run_lengths[i])
      shortest.offer(chart.level_run_length, "chart " + all.of(chart.analyzer).id + '/' +
                                                 all.of(chart.standard).id + '/' +
                                                 all.of(chart.measurand).id);
  }
  for (std::size_t i = 0; i < all.comparisons.size(); ++i)
    if (!draft.comparison_run_lengths[i])
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
  const BudgetShares shares = share_alarm_budget(
      allowed, entries_of(draft.settings.charts, draft.chart_run_lengths), comparison_entries(draft));
  put_into(draft.settings, shares);
  if (shares.overspent) {
    top.error("false_alerts_per_year",
              "found " + shown(allowed) + ", of which own in_control_run_length settings use up " +
                  shown(std::ceil(shares.taken_per_year * 100) / 100) +
                  " a year; expected some to be left: raise it, or raise or remove in_control_run_length");
  } else if (judge) {
    if (draft.settings.charts.empty() && draft.settings.comparisons.empty())
      top.warning_here("found neither check_standards nor comparisons; nothing is watched");
    judge_shares(top, shares, draft);
    const auto sections = top.named("comparisons");
    for (std::size_t i = 0; i < sections.size(); ++i)
      check_scatter(sections[i], draft.settings.comparisons[i]);
  }
}

}  // namespace agreed::settings_file
