#include "daemon/plan/advice.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

#include "config/value_text.hpp"
#include "core/base/budget_entries.hpp"

namespace agreed::plan {
namespace {

using settings_file::shown;

constexpr double kUselessRunLength = 20;  // of which `agreed check` makes an error

/// `whole` of the value counted in units of its third digit. A rounding error off a number of three digits is
/// that number. Units above one are multiplied by and those below divided by, so that decimals stay short.
template <class Whole>
double to_three_digits(double value, Whole whole) {
  const int place = static_cast<int>(std::floor(std::log10(value))) - 2;
  const double unit = std::pow(10.0, std::abs(place));
  return place >= 0 ? whole(value / unit) * unit : whole(value * unit) / unit;
}
constexpr double kRoundingError = 1e-6;  // of the third digit

/// The settings that a change of the configuration would make; nothing if it would not be valid.
std::optional<Settings> shared_anew(Settings settings, double allowance) {
  const BudgetShares shares =
      share_alarm_budget(allowance, chart_entries(settings), comparison_entries(settings));
  if (shares.overspent) return std::nullopt;
  apply_budget(shares, settings);
  for (const ChartSettings& chart : settings.charts)
    if (chart.method != ChartMethod::classical && chart.level_run_length < kUselessRunLength)
      return std::nullopt;
  for (const ComparisonSettings& comparison : settings.comparisons)
    if (comparison.warning_run_length < kUselessRunLength ||
        comparison.scatter_run_length <= comparison.window_pairs)
      return std::nullopt;
  return settings;
}

/// The charts that one check standard's one measurand has, on all analyzers: what its settings are for.
std::vector<ChartIndex> siblings(const Settings& settings, ChartIndex chart) {
  std::vector<ChartIndex> all;
  for (std::uint32_t i = 0; i < settings.charts.size(); ++i)
    if (settings.charts[i].standard == settings.of(chart).standard &&
        settings.charts[i].measurand == settings.of(chart).measurand &&
        settings.charts[i].method == settings.of(chart).method)
      all.push_back({i});
  return all;
}

std::string section_of(const Settings& settings, const Stream& stream) {
  if (stream.comparison) return "comparisons." + settings.of(*stream.comparison).id;
  return "check_standards." + settings.of(settings.of(*stream.chart).standard).id;
}

std::string run_length_key(const Settings& settings, const Stream& stream) {
  const std::string section = section_of(settings, stream);
  if (stream.comparison) return section + ".in_control_run_length";
  return section + ".measurands." + settings.of(settings.of(*stream.chart).measurand).id +
         ".charts.in_control_run_length";
}

void set_every(Settings& settings, const Stream& stream, Duration every) {
  if (stream.comparison) {
    settings.comparisons[stream.comparison->value].every = every;
    return;
  }
  const StandardIndex standard = settings.of(*stream.chart).standard;
  for (ChartSettings& chart : settings.charts)
    if (chart.standard == standard) chart.every = every;
}

void set_run_length(Settings& settings, const Stream& stream, double readings) {
  if (stream.comparison) {
    settings.comparisons[stream.comparison->value].own_run_length = readings;
    return;
  }
  for (const ChartIndex chart : siblings(settings, *stream.chart))
    settings.charts[chart.value].own_run_length = readings;
}

std::optional<double> run_length_set(const Settings& settings, const Stream& stream) {
  return stream.comparison ? settings.of(*stream.comparison).own_run_length
                           : settings.of(*stream.chart).own_run_length;
}

/// False alerts a year that are taken off the allowance for a run length of the main score.
double taken_by(Duration every, double run_length) {
  static_assert(score_part == warning_part);
  const std::chrono::duration<double> year = std::chrono::hours(24 * 365);
  return year / every / run_length / score_part;
}

/// By how much more an own run length uses up than what was used up before.
double more_taken(Duration every, double run_length, Duration every_before, double run_length_before) {
  return taken_by(every, run_length) - taken_by(every_before, run_length_before);
}

/// The allowance with which everything that lives on a share keeps the share that it has.
double allowance_beside(const Settings& before, const Settings& after) {
  double allowance = before.alarm_budget.allowed_per_year;
  for (std::size_t i = 0; i < after.charts.size(); ++i) {
    const ChartSettings &old = before.charts[i], &changed = after.charts[i];
    if (changed.own_run_length)
      allowance += more_taken(changed.every, *changed.own_run_length, old.every, old.level_run_length);
  }
  for (std::size_t i = 0; i < after.comparisons.size(); ++i) {
    const ComparisonSettings &old = before.comparisons[i], &changed = after.comparisons[i];
    if (changed.own_run_length)
      allowance += more_taken(changed.every, *changed.own_run_length, old.every, old.warning_run_length);
  }
  const double allowed = before.alarm_budget.allowed_per_year;
  return allowance > allowed * (1 + kRoundingError) ? rounded_up(allowance) : allowed;
}

SettingChange allowance_change(const Settings& settings, double value) {
  return {"false_alerts_per_year", shown(value), shown(settings.alarm_budget.allowed_per_year)};
}

std::optional<Advice> more_often(const Settings& settings, const Stream& stream, const EveryRemedy& remedy) {
  Settings changed = settings;
  set_every(changed, stream, remedy.every);
  const double allowance = allowance_beside(settings, changed);
  const auto then = shared_anew(std::move(changed), allowance);
  if (!then) return std::nullopt;
  Advice advice{.kind = "every",
                .changes = {{section_of(settings, stream) + ".every", shown(remedy.every),
                             shown(every_of(settings, stream))}},
                .share = remedy.share,
                .false_alerts_per_year = then->alarm_budget.expected_per_year,
                .demand = 1 / std::chrono::duration<double>(remedy.every).count()};
  if (allowance > settings.alarm_budget.allowed_per_year)
    advice.changes.push_back(allowance_change(settings, allowance));
  return advice;
}

/// A run length of its own, and so much more allowance that nothing else changes.
std::optional<Advice> own_run_length(const Settings& settings, const Stream& stream,
                                     const RunLengthRemedy& remedy) {
  const double readings = remedy.in_control_run_length;
  Settings changed = settings;
  set_run_length(changed, stream, readings);
  const double allowance = allowance_beside(settings, changed);
  const auto then = shared_anew(changed, allowance);
  if (!then) return std::nullopt;
  const auto now = run_length_set(settings, stream);
  Advice advice{.kind = "in_control_run_length",
                .changes = {{run_length_key(settings, stream), shown(readings), now ? shown(*now) : ""}},
                .share = remedy.share,
                .false_alerts_per_year = then->alarm_budget.expected_per_year,
                .demand = 1 / readings,
                .many_false_alerts = remedy.short_one};
  if (allowance > settings.alarm_budget.allowed_per_year)
    advice.changes.push_back(allowance_change(settings, allowance));
  return advice;
}

std::optional<Advice> larger_allowance(const Settings& settings, const RunLengthRemedy& remedy) {
  if (!remedy.false_alerts_per_year) return std::nullopt;
  const double allowance = rounded_up(*remedy.false_alerts_per_year);
  const auto then = shared_anew(settings, allowance);
  if (!then) return std::nullopt;
  return Advice{.kind = "false_alerts_per_year",
                .changes = {allowance_change(settings, allowance)},
                .share = remedy.share,
                .false_alerts_per_year = then->alarm_budget.expected_per_year,
                .demand = allowance,
                .many_false_alerts = remedy.short_one};
}

/// Gives a stream with an own run length a longer one, told once for all that one setting is for.
void lengthen(const Settings& settings, const Stream& stream, double readings, Settings& changed,
              Advice& advice) {
  const std::string key = run_length_key(settings, stream);
  if (std::ranges::any_of(advice.changes, [&](const SettingChange& one) { return one.key == key; })) return;
  const double longer = rounded_up(readings);
  set_run_length(changed, stream, longer);
  const auto now = run_length_set(settings, stream);
  advice.changes.push_back({key, shown(longer), now ? shown(*now) : ""});
}

void put_first(std::vector<Advice>& all, FirstRemedy first) {
  const auto is_first = [first](const Advice& advice) {
    switch (first) {
      case FirstRemedy::run_length:
        return advice.kind == "in_control_run_length" || advice.kind == "false_alerts_per_year";
      case FirstRemedy::every:
        return advice.kind == "every";
      case FirstRemedy::sd:
        return advice.kind == "repeatability";
      case FirstRemedy::not_needed:
      case FirstRemedy::none:
        return false;
    }
    return false;
  };
  std::stable_partition(all.begin(), all.end(), is_first);
}

}  // namespace

std::string name_of(const Settings& settings, const Stream& stream) {
  if (stream.comparison) return settings.of(*stream.comparison).id;
  const ChartSettings& chart = settings.of(*stream.chart);
  return settings.of(chart.analyzer).id + "/" + settings.of(chart.standard).id + "/" +
         settings.of(chart.measurand).id;
}

Duration every_of(const Settings& settings, const Stream& stream) {
  return stream.comparison ? settings.of(*stream.comparison).every : settings.of(*stream.chart).every;
}

double rounded_down(double value) {
  return to_three_digits(value, [](double units) { return std::floor(units + kRoundingError); });
}

double rounded_up(double value) {
  return to_three_digits(value, [](double units) { return std::ceil(units - kRoundingError); });
}

std::vector<Advice> advice_on_notice(const Settings& settings, const Stream& stream, const Notice& notice) {
  std::vector<Advice> all;
  const auto add = [&all](std::optional<Advice> advice) {
    if (advice) all.push_back(*std::move(advice));
  };
  if (notice.every) add(more_often(settings, stream, *notice.every));
  if (notice.run_length) {
    add(own_run_length(settings, stream, *notice.run_length));
    add(larger_allowance(settings, *notice.run_length));
  }
  if (notice.sd)
    all.push_back({.kind = "repeatability",
                   .sd_factor = rounded_down(notice.sd->factor),
                   .share = notice.sd->share,
                   .false_alerts_per_year = settings.alarm_budget.expected_per_year,
                   .demand = 1 / notice.sd->factor});
  put_first(all, notice.first);
  return all;
}

std::vector<Advice> advice_on_budget(const Settings& settings, const WishedBudget& budget) {
  const double allowance = rounded_down(budget.false_alerts_per_year.value_or(budget.wished));
  Settings changed = settings;
  Advice advice{.kind = "false_alerts_per_year"};
  if (!budget.false_alerts_per_year) {
    // Own run lengths alone use up what is wished: each is left an even share of it.
    advice.kind = "in_control_run_length";
    for (const FixedRate& rate : budget.fixed)
      if (!rate.classical)
        lengthen(settings, {rate.chart, rate.comparison}, rate.even_run_length, changed, advice);
  }
  const auto then = shared_anew(std::move(changed), allowance);
  constexpr double kNoMore = 1 + 1e-6;
  if (!then || then->alarm_budget.expected_per_year > budget.wished * kNoMore) return {};
  if (allowance != settings.alarm_budget.allowed_per_year)
    advice.changes.push_back(allowance_change(settings, allowance));
  advice.false_alerts_per_year = then->alarm_budget.expected_per_year;
  return {std::move(advice)};
}

}  // namespace agreed::plan
