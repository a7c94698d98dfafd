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
std::string way(const Advice& advice, const StreamNotice& stream, const BudgetAnswer* wish,
                const Measurand& measurand) {
  std::string text;
  if (advice.sd_factor)
    text = "a better repeatability: sd of a " + std::string(stream.stream.chart ? "reading" : "pair") + " " +
           significant(rounded_down(*advice.sd_factor * stream.sd), 3) + " " + measurand.unit + " (now " +
           significant(stream.sd, 3) + ")";
  else
    text = changes_words(advice.changes);
  if (advice.share) text += "; " + percent_with_error(*advice.share) + " are noticed in time then";
  if (!advice.changes.empty()) text += ", with " + false_alerts_words(advice);
  if (wish != nullptr && advice.false_alerts_per_year > wish->wished) text += ", more than wished";
  if (advice.many_false_alerts) text += "; so many have to be answered by hand";
  return text;
}

std::string state_of(const StreamNotice& stream, const Settings& settings, const char* what) {
  if (!stream.notice) return "not known: give --sd for " + stream.missing;
  const Notice& notice = *stream.notice;
  const Duration every = every_of(settings, stream.stream);
  if (!notice.median) return "half of them are not noticed at all";
  return "half noticed by " + with_error(*notice.median) + " " + what + ", " +
         span_words(notice.median->value, every) + "; in time " + percent_with_error(notice.share);
}

void show_stream(Paper& paper, const StreamNotice& stream, const BudgetAnswer* wish, const Settings& settings,
                 const Measurand& measurand, bool needed) {
  const char* const what = stream.stream.chart ? "readings" : "pairs";
  const bool met = stream.notice && stream.notice->met;
  paper.row(met ? "  met by" : "  not by", std::string(stream.stream.chart ? "chart " : "comparison ") +
                                               name_of(settings, stream.stream) + ": " +
                                               state_of(stream, settings, what));
  if (!needed || !stream.notice) return;
  const char* label = "  change";
  for (const Advice& advice : stream.advice) {
    paper.row(label, way(advice, stream, wish, measurand));
    label = "  or";
  }
  if (stream.notice->shift)
    paper.row("", "As it is, the least shift noticed in time is " +
                      significant(rounded_up(*stream.notice->shift), 3) + " " + measurand.unit + ".");
  else if (stream.advice.empty())
    paper.row("",
              "No one change makes it notice in time: allow more time, or combine more frequent "
              "readings with a better repeatability.");
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
  std::vector<bool> shown_already(answer.streams.size(), false);
  for (const AnalyzerNotice& analyzer : answer.analyzers) {
    paper.row(analyzer.met ? "  met" : "  NOT MET", "of " + settings.of(analyzer.analyzer).id);
    for (const std::size_t i : analyzer.streams) {
      // A comparison watches two analyzers: what to change is told once.
      show_stream(paper, answer.streams[i], wish, settings, measurand, !analyzer.met && !shown_already[i]);
      shown_already[i] = true;
    }
  }
}

}  // namespace agreed::plan
