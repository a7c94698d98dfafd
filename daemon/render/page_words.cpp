#include "daemon/render/page_words.hpp"

#include <algorithm>
#include <cmath>

namespace agreed {
namespace {

std::string since_words(const std::optional<Instant>& since, Instant now) {
  if (!since) return {};
  return "since " + time_words(*since) + (now > *since ? " (" + shown_span(now - *since) + ")" : "");
}

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

bool drifting(const ComparisonView& view) {
  return view.pair_chart.state == PairChartState::unstable;
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

/// Agreement was lost and the verdict says neither that it is back nor, any more, that it is not.
bool is_lost(const ComparisonView& view) {
  return view.agreement_lost && (view.verdict == Verdict::inconclusive || view.verdict == Verdict::gathering);
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

/// How much of the allowable difference the bias takes; only of a level that speaks.
double share_taken(const LevelView& level) {
  return std::abs(*level.bias) / *level.allowable;
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

/// The level that carries the sentence: among those that have the comparison's verdict when it is not good,
/// else among all.
std::optional<std::size_t> speaking_level(const ComparisonView& view) {
  if (view.verdict != Verdict::agreement_shown) {
    const auto own =
        largest_share(view, [&](const LevelView& level) { return level.verdict == view.verdict; });
    if (own) return own;
  }
  return foremost_level(view);
}

/// What the level says now, which the confirmed verdict may not say yet, or no more.
std::string sentence_of(const ComparisonScene& scene, const LevelView& level) {
  if (level.verdict != Verdict::agreement_shown && level.verdict != Verdict::disagreement_shown)
    return undecided(scene, level);
  const std::string words =
      level.verdict == Verdict::agreement_shown ? agreeing(scene, level) : disagreeing(scene, level);
  return level.verdict == scene.view.verdict ? words : words + " That is not confirmed yet.";
}

/// The sentence with the comparison's name in front.
std::string named(const ComparisonScene& scene, std::string sentence) {
  if (!sentence.empty() && sentence[0] >= 'A' && sentence[0] <= 'Z')
    sentence[0] = static_cast<char>(sentence[0] - 'A' + 'a');
  return scene.name() + ": " + sentence;
}

std::string several_sentence(const std::vector<std::string>& names, std::size_t of, std::string_view what) {
  constexpr std::size_t kNamed = 3;
  std::string out =
      std::to_string(names.size()) + " of " + std::to_string(of) + " comparisons " + std::string(what) + ": ";
  for (std::size_t i = 0; i < names.size() && i < kNamed; ++i)
    out += (i ? ", " : "") + shortened(names[i], 60);
  if (names.size() > kNamed) out += " and " + std::to_string(names.size() - kNamed) + " more";
  return out + ".";
}

}  // namespace

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

namespace {

Answer starting_answer(const Snapshot& snapshot) {
  Answer answer{AnswerKind::starting, "Starting", "starting", {}, {}, snapshot.not_ready};
  answer.sentence = "The service is reading its journal; the answer follows when that is done.";
  return answer;
}

/// What the comparisons of one verdict say together.
struct Group {
  std::vector<std::string> names;
  std::optional<Instant> earliest, latest;
  double most = -1;      ///< largest share of its allowable difference that a bias takes
  std::string sentence;  ///< of that comparison
};

void add_to(Group& group, const ComparisonScene& scene) {
  group.names.push_back(scene.name());
  if (const auto since = is_lost(scene.view) ? scene.view.agreement_lost : scene.view.verdict_since) {
    group.earliest = group.earliest ? std::min(*group.earliest, *since) : *since;
    group.latest = group.latest ? std::max(*group.latest, *since) : *since;
  }
  const auto level = speaking_level(scene.view);
  const double share = level ? share_taken(scene.view.levels[*level]) : -0.5;
  if (share <= group.most) return;
  group.most = share;
  group.sentence = named(scene, answer_for(scene).sentence);
}

Answer answer_of_several(const Snapshot& snapshot) {
  Group yes, no, waiting;
  bool changing = false, lost = false;
  const std::size_t count = snapshot.settings->comparisons.size();
  for (std::uint32_t i = 0; i < count; ++i) {
    const ComparisonScene scene = comparison_scene(snapshot, ComparisonIndex{i});
    const Verdict verdict = scene.view.verdict;
    add_to(verdict == Verdict::agreement_shown                             ? yes
           : verdict == Verdict::disagreement_shown || is_lost(scene.view) ? no
                                                                           : waiting,
           scene);
    lost = lost || is_lost(scene.view);
    changing = changing || drifting(scene.view);
  }
  Answer answer;
  if (!no.names.empty()) {
    answer = {AnswerKind::no,
              "No",
              lost ? "agreement lost" : "disagreement shown",
              since_words(no.earliest, snapshot.at),
              no.sentence,
              {}};
    answer.more.push_back(
        several_sentence(no.names, count, lost ? "disagree or have lost agreement" : "disagree"));
  } else if (waiting.names.empty()) {
    answer = {AnswerKind::yes,   changing ? "Yes, but changing" : "Yes",
              "agreement shown", since_words(yes.latest, snapshot.at),
              yes.sentence,      {}};
    answer.more.push_back("Agreement is shown in all " + std::to_string(count) + " comparisons.");
  } else {
    answer = {AnswerKind::not_yet,
              yes.names.empty() ? "Not yet" : "Not all",
              yes.names.empty() ? "not shown yet" : "not shown everywhere",
              {},
              waiting.sentence,
              {}};
    answer.more.push_back(several_sentence(waiting.names, count, "do not show agreement"));
  }
  if (changing) answer.more.push_back("In at least one comparison a change is under way.");
  return answer;
}

Answer answer_of_all(const Snapshot& snapshot) {
  const std::size_t count = snapshot.settings->comparisons.size();
  if (count == 0)
    return {AnswerKind::not_yet,
            "Nothing compared",
            "no comparison",
            {},
            "The configuration names no comparison, so nothing is said about agreement.",
            {}};
  if (count > 1) return answer_of_several(snapshot);
  const ComparisonScene scene = comparison_scene(snapshot, ComparisonIndex{0});
  Answer answer = answer_for(scene);
  answer.sentence = named(scene, answer.sentence);
  return answer;
}

}  // namespace

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

Answer overall_answer(const Snapshot& snapshot) {
  if (!snapshot.started || !snapshot.settings) return starting_answer(snapshot);
  Answer answer = answer_of_all(snapshot);
  if (!snapshot.ready)
    for (const std::string& reason : snapshot.not_ready)
      answer.more.push_back("At present no results are taken in: " + reason);
  return answer;
}

}  // namespace agreed
