#include "daemon/plan/wish_text.hpp"

#include <algorithm>

#include <fmt/format.h>

#include "config/value_text.hpp"
#include "core/base/number_text.hpp"

namespace agreed::plan {
namespace {

using settings_file::shown;

std::string change_words(const SettingChange& change) {
  return change.key + ": " + change.value + (change.now.empty() ? "" : " (now " + change.now + ")");
}

std::string changes_words(const std::vector<SettingChange>& changes) {
  std::string text;
  for (const SettingChange& change : changes) text += (text.empty() ? "" : " and ") + change_words(change);
  return text;
}

std::string false_alerts_words(const Advice& advice) {
  return significant(advice.false_alerts_per_year, 3) + " false alerts a year";
}

/// One of several ways to meet a wish to notice.
struct Way {
  Advice advice;
  const StreamNotice* stream;            ///< whose advice it is
  std::string key;                       ///< the same for advices that differ in their value alone
  std::vector<AnalyzerIndex> analyzers;  ///< whose shifts are noticed then
  std::string sds;                       ///< of a better repeatability: which sds
};

std::string sd_words(const Advice& advice, const StreamNotice& stream, const Settings& settings) {
  if (!advice.sd_factor) return "";
  const std::string whose = stream.stream.chart
                                ? " on " + settings.of(settings.of(*stream.stream.chart).analyzer).id
                                : " of a pair of " + name_of(settings, stream.stream);
  return significant(rounded_down(*advice.sd_factor * stream.sd), 3) + whose + " (now " +
         significant(stream.sd, 3) + ")";
}

/// The least demanding of each key among the streams of one analyzer: one that notices is enough.
std::vector<Way> ways_of(const NoticeAnswer& answer, const AnalyzerNotice& analyzer,
                         const Settings& settings) {
  std::vector<Way> ways;
  for (const std::size_t i : analyzer.streams) {
    const StreamNotice& stream = answer.streams[i];
    for (const Advice& advice : stream.advice) {
      std::string key = advice.kind;
      for (const SettingChange& change : advice.changes) key += " " + change.key;
      if (advice.sd_factor && stream.stream.comparison) key += " " + name_of(settings, stream.stream);
      Way way{advice, &stream, key, {analyzer.analyzer}, sd_words(advice, stream, settings)};
      const auto same = std::ranges::find(ways, key, &Way::key);
      if (same == ways.end())
        ways.push_back(std::move(way));
      else if (advice.demand < same->advice.demand)
        *same = std::move(way);
    }
  }
  return ways;
}

/// The most demanding of each key among the analyzers: it must do for all of them.
std::vector<Way> ways_of(const NoticeAnswer& answer, const Settings& settings) {
  std::vector<Way> ways;
  for (const AnalyzerNotice& analyzer : answer.analyzers) {
    if (analyzer.met) continue;
    for (Way& way : ways_of(answer, analyzer, settings)) {
      const auto same = std::ranges::find(ways, way.key, &Way::key);
      if (same == ways.end()) {
        ways.push_back(std::move(way));
        continue;
      }
      std::vector<AnalyzerIndex> all = same->analyzers;
      all.push_back(analyzer.analyzer);
      const std::string sds = way.stream->stream.chart ? same->sds + " and " + way.sds : way.sds;
      if (way.advice.demand > same->advice.demand) *same = std::move(way);
      same->analyzers = std::move(all);
      same->sds = sds;
    }
  }
  std::stable_partition(ways.begin(), ways.end(), [](const Way& way) { return !way.advice.sd_factor; });
  return ways;
}

std::string names_of(const std::vector<AnalyzerIndex>& analyzers, const Settings& settings) {
  std::string text;
  for (const AnalyzerIndex analyzer : analyzers)
    text += (text.empty() ? "" : ", ") + settings.of(analyzer).id;
  return text;
}

std::string words_of(const Way& way, const BudgetAnswer* wish, std::size_t not_met, const Settings& settings,
                     const Measurand& measurand) {
  const Advice& advice = way.advice;
  std::string text = changes_words(advice.changes);
  if (advice.sd_factor) {
    text = "a better repeatability: sd " + way.sds + " in " + measurand.unit;
    if (way.analyzers.size() < not_met) text += ", for shifts of " + names_of(way.analyzers, settings);
  } else if (way.analyzers.size() < not_met) {
    text += ", for shifts of " + names_of(way.analyzers, settings);
  }
  if (advice.share) text += "; " + percent_with_error(*advice.share) + " are noticed in time then";
  constexpr double kMore = 1.001;
  if (advice.false_alerts_per_year > kMore * settings.alarm_budget.expected_per_year) {
    text += ", with " + false_alerts_words(advice);
    if (wish != nullptr && advice.false_alerts_per_year > wish->wished) text += ", more than wished";
    if (advice.many_false_alerts) text += ", which have to be answered by hand";
  }
  return text;
}

std::string state_of(const StreamNotice& stream, const Settings& settings) {
  if (!stream.notice) return "not known: give --sd for " + stream.missing;
  const Notice& notice = *stream.notice;
  if (!notice.median) return "half of such shifts are not noticed at all";
  const std::string number = with_error(*notice.median);
  const std::string what = stream.stream.chart ? "reading" : "pair";
  return "half noticed by " + number + " " + what + (number == "1" ? "" : "s") + ", " +
         span_words(notice.median->value, every_of(settings, stream.stream)) + "; in time " +
         percent_with_error(notice.share);
}

void show_analyzer(Paper& paper, const AnalyzerNotice& analyzer, const NoticeAnswer& answer,
                   const Settings& settings, const Measurand& measurand) {
  std::optional<double> least;
  for (const std::size_t i : analyzer.streams)
    if (const auto& notice = answer.streams[i].notice; notice && notice->shift)
      least = least ? std::min(*least, *notice->shift) : *notice->shift;
  std::string text = "for " + settings.of(analyzer.analyzer).id;
  if (least)
    text +=
        "; the least shift noticed in time is " + significant(rounded_up(*least), 3) + " " + measurand.unit;
  paper.row(analyzer.met ? "  met" : "  NOT MET", text);
  for (const std::size_t i : analyzer.streams) {
    const StreamNotice& stream = answer.streams[i];
    paper.row("", std::string(stream.stream.chart ? "chart " : "comparison ") +
                      name_of(settings, stream.stream) + ": " + state_of(stream, settings));
  }
}

}  // namespace

void show_budget_wish(Paper& paper, const BudgetAnswer& answer, const Settings& settings) {
  paper.heading("Wish: no more than " + shown(answer.wished) + " false alerts a year");
  paper.row(answer.met ? "  met" : "  NOT MET",
            significant(answer.expected, 3) + " a year are to be expected");
  if (answer.met) return;
  for (const Advice& advice : answer.advice)
    paper.row("  change", changes_words(advice.changes) + "; then " + false_alerts_words(advice));
  if (!answer.advice.empty()) {
    paper.row("", "Limits get wider by it: run it again to see what is noticed later.");
    return;
  }
  std::string fixed_ones;
  for (const FixedRate& rate : answer.budget.fixed)
    fixed_ones += (fixed_ones.empty() ? "" : ", ") + name_of(settings, {rate.chart, rate.comparison}) + " (" +
                  significant(rate.per_year, 3) + ")";
  paper.row("",
            "No allowance meets it: what is chosen for " + fixed_ones +
                " calls out that often by itself. Use method change_point there, fewer or wider limits, or a "
                "longer in_control_run_length.");
}

void show_notice_wish(Paper& paper, const NoticeAnswer& answer, const BudgetAnswer* wish,
                      const Settings& settings) {
  const Measurand& measurand = settings.of(answer.wish.measurand);
  paper.heading("Wish: a shift of one analyzer by " + shown(answer.wish.wish.shift) + " " + measurand.unit +
                " in " + measurand.id + " is noticed within " + shown(answer.wish.wish.within) +
                ", in half of the cases");
  if (answer.analyzers.empty())
    paper.row("  NOT MET", "no check standard and no comparison has " + measurand.id);
  std::size_t not_met = 0;
  for (const AnalyzerNotice& analyzer : answer.analyzers) {
    show_analyzer(paper, analyzer, answer, settings, measurand);
    if (!analyzer.met) ++not_met;
  }
  if (not_met == 0) return;
  const std::vector<Way> ways = ways_of(answer, settings);
  const char* label = "  change";
  for (const Way& way : ways) {
    paper.row(label, words_of(way, wish, not_met, settings, measurand));
    label = "  or";
  }
  if (ways.empty() && !answer.analyzers.empty())
    paper.row("",
              "No one change does it: allow more time, or combine more frequent readings with a better "
              "repeatability.");
}

}  // namespace agreed::plan
