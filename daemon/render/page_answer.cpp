// The one answer that stands first: of a comparison as it is now, and of all comparisons together.
#include <algorithm>

#include "daemon/render/page_freshness.hpp"
#include "daemon/render/page_words.hpp"

namespace agreed {
namespace {

std::string lowered(std::string text) {
  if (!text.empty() && text[0] >= 'A' && text[0] <= 'Z') text[0] = static_cast<char>(text[0] - 'A' + 'a');
  return text;
}

/// The sentence with the comparison's name in front.
std::string named(const ComparisonScene& scene, const std::string& sentence) {
  return scene.name() + ": " + lowered(sentence);
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

/// Agreement is what old evidence cannot promise any more. Disagreement stays what it was, and old.
void tell_out_of_date(Answer& answer, const Freshness& fresh, Instant now) {
  if (answer.kind == AnswerKind::no) {
    answer.word += ", and out of date";
    return;
  }
  if (answer.kind != AnswerKind::yes) return;
  answer.kind = AnswerKind::out_of_date;
  answer.word = "Out of date";
  answer.verdict = "agreement was shown";
  answer.since = "until " + time_words(*fresh.newest) + " (" + age_words(*fresh.newest, now) + ")";
  answer.sentence = "Nothing is known since. What the pairs said then: " + answer.sentence;
}

bool cannot_be_reached(const Snapshot& snapshot, AnalyzerIndex analyzer) {
  if (analyzer.value >= snapshot.analyzers.size()) return false;
  const InboxState& inbox = snapshot.analyzers[analyzer.value].inbox;
  return !inbox.reachable && !inbox.reason.empty();
}

void tell_inbox(Answer& answer, const Snapshot& snapshot, AnalyzerIndex analyzer) {
  if (!cannot_be_reached(snapshot, analyzer)) return;
  answer.more.push_back("The inbox of " + snapshot.settings->of(analyzer).id + " cannot be reached (" +
                        snapshot.analyzers[analyzer.value].inbox.reason +
                        "): until it can, nothing new comes from there.");
}

}  // namespace

Answer current_answer(const Snapshot& snapshot, const ComparisonScene& scene) {
  Answer answer = answer_for(scene);
  const Freshness fresh = freshness_of(snapshot, scene);
  answer.age = fresh.words;
  if (fresh.overdue) tell_out_of_date(answer, fresh, snapshot.at);
  tell_inbox(answer, snapshot, scene.asked.x);
  tell_inbox(answer, snapshot, scene.asked.y);
  return answer;
}

void tell_interrupted(Answer& answer, const Snapshot& snapshot) {
  if (snapshot.ready || answer.kind == AnswerKind::starting) return;
  if (answer.kind == AnswerKind::yes) {
    answer.kind = AnswerKind::interrupted;
    answer.word = "Interrupted";
    answer.verdict = "agreement was shown";
    answer.sentence = "No results are taken in at present. What the pairs said before: " + answer.sentence;
  }
  for (const std::string& reason : snapshot.not_ready)
    answer.more.push_back("At present no results are taken in: " + reason);
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

/// How old the comparisons' evidence is: the newest of all, and which of them are out of date.
struct Ages {
  std::optional<Instant> newest, oldest_overdue;
  std::vector<std::string> overdue;

  void add(const Snapshot& snapshot, const ComparisonScene& scene) {
    const Freshness fresh = freshness_of(snapshot, scene);
    if (fresh.newest) newest = newest ? std::max(*newest, *fresh.newest) : *fresh.newest;
    if (!fresh.overdue) return;
    overdue.push_back(scene.name());
    oldest_overdue = oldest_overdue ? std::min(*oldest_overdue, *fresh.newest) : *fresh.newest;
  }
};

void tell_ages(Answer& answer, const Ages& ages, std::size_t count, Instant now) {
  if (ages.newest)
    answer.age = "Newest pair of all " + time_words(*ages.newest) + ", " + age_words(*ages.newest, now) + ".";
  if (ages.overdue.empty()) return;
  if (ages.overdue.size() == count) {
    answer.age += " Newer ones are overdue in every comparison.";
    tell_out_of_date(answer, {ages.newest, true, {}}, now);
    return;
  }
  if (answer.kind == AnswerKind::yes) {
    answer.kind = AnswerKind::out_of_date;
    answer.word = "Not all current";
  }
  answer.more.push_back(several_sentence(ages.overdue, count, "are out of date") +
                        " The oldest had its newest pair " + age_words(*ages.oldest_overdue, now) + ".");
}

std::string agreement_in_all(const Ages& ages, std::size_t count) {
  return std::string(ages.overdue.size() == count ? "Agreement was" : "Agreement is") + " shown in all " +
         std::to_string(count) + " comparisons.";
}

void tell_inboxes(Answer& answer, const Snapshot& snapshot) {
  for (std::uint32_t i = 0; i < snapshot.settings->analyzers.size(); ++i) tell_inbox(answer, snapshot, {i});
}

Answer answer_of_several(const Snapshot& snapshot) {
  Ages ages;
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
    ages.add(snapshot, scene);
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
    answer.more.push_back(agreement_in_all(ages, count));
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
  tell_ages(answer, ages, count, snapshot.at);
  tell_inboxes(answer, snapshot);
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
  Answer answer = current_answer(snapshot, scene);
  answer.sentence = named(scene, answer.sentence);
  return answer;
}

}  // namespace

Answer overall_answer(const Snapshot& snapshot) {
  if (!snapshot.started || !snapshot.settings) return starting_answer(snapshot);
  Answer answer = answer_of_all(snapshot);
  tell_interrupted(answer, snapshot);
  return answer;
}

}  // namespace agreed
