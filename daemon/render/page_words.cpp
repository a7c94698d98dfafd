#include "daemon/render/page_words.hpp"

#include <algorithm>
#include <cmath>

namespace agreed {
namespace {

std::string at_level(const ComparisonScene& scene, double level) {
  return "at " + shortest(level) + (scene.style.unit.empty() ? "" : " " + scene.style.unit);
}

std::string capital(std::string text) {
  if (!text.empty() && text[0] >= 'a' && text[0] <= 'z') text[0] = static_cast<char>(text[0] - 'a' + 'A');
  return text;
}

std::string single_words(const LevelView& level) {
  return level.single_result ? "of single samples " + shown_share(level.single_result->share_within) + " do"
                             : "for single samples nothing can be said yet";
}

std::string agreeing(const ComparisonScene& scene, const LevelView& level) {
  return capital(at_level(scene, level.level)) + " the means agree within " +
         with_unit(*level.allowable, scene.style) + " (" + bias_direction(scene, *level.bias) + "); " +
         single_words(level) + ".";
}

std::string interval_words(const ComparisonScene& scene, const LevelView& level) {
  if (!level.low || !level.high) return "interval not known";
  return "90 % interval " + shown_signed(*level.low, scene.style.decimals) + " to " +
         shown_signed(*level.high, scene.style.decimals);
}

std::string disagreeing(const ComparisonScene& scene, const LevelView& level) {
  std::string out = capital(at_level(scene, level.level)) + " the means differ by more than the allowable " +
                    with_unit(*level.allowable, scene.style) + ": " + bias_direction(scene, *level.bias) +
                    " (" + interval_words(scene, level) + ")";
  if (level.single_result)
    out += "; of single samples " + shown_share(level.single_result->share_within) + " agree within it";
  return out + ".";
}

std::string undecided(const ComparisonScene& scene, const LevelView& level) {
  return capital(at_level(scene, level.level)) + " " + bias_direction(scene, *level.bias) + " (" +
         interval_words(scene, level) + ") and " + with_unit(*level.allowable, scene.style) +
         " is allowable: the pairs do not decide it yet; " +
         (level.single_result ? "of single samples " + shown_share(level.single_result->share_within) +
                                    " agree within the allowable difference"
                              : "for single samples nothing can be said yet") +
         ".";
}

std::string gathering_words(const ComparisonScene& scene) {
  const ComparisonView& view = scene.view;
  if (scene.measurand.decision_levels.empty() || !scene.measurand.allowable)
    return "No verdict can be given: the configuration names no " +
           std::string(scene.measurand.decision_levels.empty() ? "decision levels" : "allowable difference") +
           " for this measurand.";
  if (view.window.pairs == 0)
    return "No pair has come yet; a verdict needs " + std::to_string(scene.asked.least_pairs) + " pairs.";
  return std::to_string(view.window.pairs) + " of the " + std::to_string(scene.asked.least_pairs) +
         " pairs that a verdict needs have come.";
}

/// Why agreement that was lost is not shown again: what the comparison is waiting for.
std::string not_shown_again(const ComparisonScene& scene) {
  const ComparisonView& view = scene.view;
  const std::string pairs = std::to_string(view.window.pairs) + " of the " +
                            std::to_string(scene.asked.least_pairs) + " pairs that agreement takes";
  if (view.verdict_reason == "restarted_after_change")
    return "a further change was found, so the comparison began anew" +
           (view.window.since_intervention ? " at " + time_words(*view.window.since_intervention) : "") +
           " and has " + pairs;
  if (view.verdict == Verdict::gathering)
    return "the comparison began anew" +
           (view.window.since_intervention ? " at " + time_words(*view.window.since_intervention) : "") +
           " and has " + pairs;
  return "the pairs since then neither show it nor the opposite";
}

void add_more(Answer& answer, const ComparisonScene& scene) {
  const ComparisonView& view = scene.view;
  if (drifting(view))
    answer.more.push_back("A change is under way: the relation between the analyzers moved " +
                          beginning_words(view.pair_chart.started_at, view.pair_chart.started_between) + ".");
  const bool agreeing_now = view.verdict == Verdict::agreement_shown;
  if (!agreeing_now && view.last_agreement)
    answer.more.push_back("Agreement was last shown at " + time_words(*view.last_agreement) + ".");
  // The sentence has said it already when agreement is lost.
  const bool said = view.agreement_lost && view.verdict_reason == "restarted_after_change";
  if (!view.verdict_reason.empty() && view.verdict != Verdict::gathering && !said)
    answer.more.push_back(reason_words(view.verdict_reason));
}

/// An open alert says that agreement is lost: an answer of "not shown" beside it would play that down.
void tell_lost(Answer& answer, const ComparisonScene& scene) {
  const Instant lost = *scene.view.agreement_lost;
  const bool undecided = scene.view.verdict == Verdict::inconclusive;
  answer.kind = AnswerKind::no;
  answer.word = "Lost, not shown again";
  answer.verdict = "agreement lost";
  answer.since = since_words(lost, scene.at);
  if (undecided) answer.more.push_back(answer.sentence);
  answer.sentence = "Agreement was lost at " + time_words(lost) +
                    " and has not been shown again since: " + not_shown_again(scene) + ".";
}

bool speaks(const LevelView& level) {
  return level.bias && level.allowable && *level.allowable > 0;
}

template <class Admit>
std::optional<std::size_t> largest_share(const ComparisonView& view, Admit&& admit) {
  std::optional<std::size_t> best;
  for (std::size_t i = 0; i < view.levels.size(); ++i) {
    if (!speaks(view.levels[i]) || !admit(view.levels[i])) continue;
    if (!best || share_taken(view.levels[i]) > share_taken(view.levels[*best])) best = i;
  }
  return best;
}

/// What the level says now, which the confirmed verdict may not say yet, or no more.
std::string sentence_of(const ComparisonScene& scene, const LevelView& level) {
  if (level.verdict != Verdict::agreement_shown && level.verdict != Verdict::disagreement_shown)
    return undecided(scene, level);
  const std::string words =
      level.verdict == Verdict::agreement_shown ? agreeing(scene, level) : disagreeing(scene, level);
  return level.verdict == scene.view.verdict ? words : words + " That is not confirmed yet.";
}

}  // namespace

std::string since_words(const std::optional<Instant>& since, Instant now) {
  if (!since) return {};
  return "since " + time_words(*since) + (now > *since ? " (" + shown_span(now - *since) + ")" : "");
}

bool drifting(const ComparisonView& view) {
  return view.pair_chart.state == PairChartState::unstable;
}

bool is_lost(const ComparisonView& view) {
  return view.agreement_lost && (view.verdict == Verdict::inconclusive || view.verdict == Verdict::gathering);
}

double share_taken(const LevelView& level) {
  return std::abs(*level.bias) / *level.allowable;
}

std::optional<std::size_t> speaking_level(const ComparisonView& view) {
  if (view.verdict != Verdict::agreement_shown) {
    const auto own =
        largest_share(view, [&](const LevelView& level) { return level.verdict == view.verdict; });
    if (own) return own;
  }
  return foremost_level(view);
}

std::optional<std::size_t> foremost_level(const ComparisonView& view) {
  return largest_share(view, [](const LevelView&) { return true; });
}

std::string bias_direction(const ComparisonScene& scene, double bias) {
  const std::string size = shown(std::abs(bias), scene.style.decimals);
  if (size.find_first_of("123456789") == std::string::npos)
    return scene.y + " reads the same as " + scene.x + " (to within " + with_unit(0, scene.style) + ")";
  return scene.y + " reads " + with_unit(std::abs(bias), scene.style) + (bias > 0 ? " higher" : " lower") +
         " than " + scene.x;
}

std::string verdict_words(Verdict verdict) {
  switch (verdict) {
    case Verdict::agreement_shown:
      return "agreement shown";
    case Verdict::disagreement_shown:
      return "disagreement shown";
    case Verdict::inconclusive:
      return "inconclusive";
    case Verdict::gathering:
      break;
  }
  return "gathering";
}

std::string reason_words(const std::string& reason) {
  if (reason == "restarted_after_change")
    return "A change was found, so the comparison began anew at its start and speaks of the pairs since "
           "then.";
  if (reason == "not_covered")
    return "Not every decision level lies within the range of the samples, so nothing is said there.";
  if (reason == "not_decided") return "The interval reaches across a limit of the allowable difference.";
  if (reason == "not_confirmed") return "It holds now, but not yet on enough pairs in a row.";
  return reason.find(' ') == std::string::npos ? "Reason: " + spaced(reason) + "." : reason;
}

std::string beginning_words(const std::optional<Instant>& at, const std::optional<Period>& between) {
  if (between && between->first != between->last)
    return "between " + time_words(between->first) + " and " + time_words(between->last);
  if (at) return "at " + time_words(*at);
  return "at a time not known yet";
}

Answer answer_for(const ComparisonScene& scene) {
  const ComparisonView& view = scene.view;
  Answer answer;
  answer.verdict = verdict_words(view.verdict);
  answer.since = since_words(view.verdict_since, scene.at);
  const auto level = speaking_level(view);
  switch (view.verdict) {
    case Verdict::agreement_shown:
      answer.kind = AnswerKind::yes;
      answer.word = drifting(view) ? "Yes, but changing" : "Yes";
      answer.sentence = level ? sentence_of(scene, view.levels[*level]) : "Agreement is shown.";
      break;
    case Verdict::disagreement_shown:
      answer.kind = AnswerKind::no;
      answer.word = "No";
      answer.sentence = level ? sentence_of(scene, view.levels[*level]) : "Disagreement is shown.";
      break;
    case Verdict::inconclusive:
      answer.word = "Not shown";
      answer.sentence = level ? sentence_of(scene, view.levels[*level]) : "The pairs do not decide it yet.";
      break;
    case Verdict::gathering:
      answer.word = "Not yet";
      answer.since.clear();
      answer.sentence = gathering_words(scene);
      break;
  }
  if (is_lost(view)) tell_lost(answer, scene);
  add_more(answer, scene);
  return answer;
}

std::string budget_words(const AlarmBudget& budget) {
  if (!(budget.expected_per_year > 0)) return {};
  std::string out = "By chance alone " + shown(budget.expected_per_year, 1) +
                    " false alerts a year are expected of what is configured (" +
                    shortest(budget.allowed_per_year) + " are allowed)";
  const char* before = ": ";
  for (const auto& [kind, expected] : budget.by_kind) {
    out += before + spaced(kind) + " " + shown(expected, expected < 0.1 ? 2 : 1);
    before = ", ";
  }
  return out + ".";
}

}  // namespace agreed
