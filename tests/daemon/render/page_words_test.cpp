// The sentences: they name the numbers, both for the mean and for single results, and never claim more.
#include "daemon/render/page_words.hpp"

#include <doctest/doctest.h>

#include "daemon/render/page_chart_words.hpp"
#include "page_mill.hpp"

namespace {
using namespace agreed;

bool has(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

/// The protein comparison of a story with one level whose figures are known exactly.
struct Known {
  mill::Story story = mill::agreeing();
  std::shared_ptr<ComparisonView> view = std::make_shared<ComparisonView>();

  Known(Verdict verdict, Verdict at_level, double bias, double low, double high, double share) {
    view->verdict = verdict;
    view->verdict_since = story.snapshot.at - std::chrono::hours(72);
    LevelView level;
    level.level = 13;
    level.bias = bias;
    level.low = low;
    level.high = high;
    level.allowable = 0.2;
    level.verdict = at_level;
    level.single_result = SingleResultView{share, bias - 0.06, bias + 0.06};
    view->levels = {level};
    view->window.pairs = 140;
    story.snapshot.comparisons[1] = view;
  }
  [[nodiscard]] ComparisonScene scene() const { return comparison_scene(story.snapshot, ComparisonIndex{1}); }
  [[nodiscard]] Answer answer() const { return answer_for(scene()); }
};

const std::string kTied = "\u00a0";

}  // namespace

TEST_CASE("agreement: one sentence for the means and for single samples, with sizes and direction") {
  const Known known(Verdict::agreement_shown, Verdict::agreement_shown, 0.0204, 0.01, 0.03, 0.982);
  const Answer answer = known.answer();
  CHECK(answer.kind == AnswerKind::yes);
  CHECK(answer.word == "Yes");
  CHECK(answer.sentence == "At 13 g/100 g the means agree within 0.200" + kTied +
                               "g/100 g (line2 reads 0.020" + kTied +
                               "g/100 g higher than line1); of single samples 98" + kTied + "% do.");
  CHECK(answer.since == "since 2026-01-28 02:03 UTC (3 days)");
}

TEST_CASE("disagreement: says by how much more than is allowable, and who reads lower") {
  const Known known(Verdict::disagreement_shown, Verdict::disagreement_shown, -0.26, -0.28, -0.24, 0.118);
  const Answer answer = known.answer();
  CHECK(answer.kind == AnswerKind::no);
  CHECK(has(answer.sentence, "differ by more than the allowable 0.200" + kTied + "g/100 g"));
  CHECK(has(answer.sentence, "line2 reads 0.260" + kTied + "g/100 g lower than line1"));
  CHECK(has(answer.sentence, "\u22120.280 to \u22120.240"));
  CHECK(has(answer.sentence, "of single samples 12" + kTied + "% agree within it"));
}

TEST_CASE("inconclusive is never worded as agreement") {
  const Known known(Verdict::inconclusive, Verdict::inconclusive, 0.15, 0.08, 0.22, 0.8);
  const Answer answer = known.answer();
  CHECK(answer.kind == AnswerKind::not_yet);
  CHECK(answer.word == "Not shown");
  CHECK(has(answer.sentence, "do not decide it yet"));
  CHECK_FALSE(has(answer.sentence, "the means agree"));
}

TEST_CASE("a verdict and what its level says at the moment are told apart") {
  const Known before(Verdict::inconclusive, Verdict::agreement_shown, 0.01, 0.0, 0.02, 0.99);
  CHECK(before.answer().kind == AnswerKind::not_yet);
  CHECK(has(before.answer().sentence, "That is not confirmed yet."));
  const Known after(Verdict::agreement_shown, Verdict::inconclusive, 0.19, 0.17, 0.21, 0.6);
  CHECK(after.answer().kind == AnswerKind::yes);
  CHECK(has(after.answer().sentence, "do not decide it yet"));
}

TEST_CASE("a signalling pair chart is named beside a verdict that still stands") {
  Known known(Verdict::agreement_shown, Verdict::agreement_shown, 0.02, 0.01, 0.03, 0.98);
  known.view->pair_chart.state = PairChartState::unstable;
  known.view->pair_chart.started_at = known.story.snapshot.at - std::chrono::hours(20);
  CHECK(known.answer().word == "Yes, but changing");
  REQUIRE(known.answer().more.size() == 1);
  CHECK(has(known.answer().more[0], "at 2026-01-30 06:03 UTC"));
}

TEST_CASE("agreement that was lost is named first while nothing is shown since, with the reason") {
  Known known(Verdict::inconclusive, Verdict::inconclusive, 0.15, 0.08, 0.22, 0.8);
  known.view->agreement_lost = known.story.snapshot.at - std::chrono::hours(72);
  known.view->verdict_reason = "restarted_after_change";
  known.view->window.pairs = 6;
  known.view->window.since_intervention = known.story.snapshot.at - std::chrono::hours(20);
  const Answer answer = known.answer();
  CHECK(answer.kind == AnswerKind::no);
  CHECK(answer.word == "Lost, not shown again");
  CHECK(
      answer.sentence ==
      "Agreement was lost at 2026-01-28 02:03 UTC and has not been shown again since: a further change was "
      "found, "
      "so the comparison began anew at 2026-01-30 06:03 UTC and has 6 of the 20 pairs that agreement takes.");
  CHECK(answer.since == "since 2026-01-28 02:03 UTC (3 days)");
  REQUIRE_FALSE(answer.more.empty());
  CHECK(has(answer.more[0], "do not decide it yet"));

  known.view->verdict_reason = "not_decided";
  CHECK(has(known.answer().sentence, "the pairs since then neither show it nor the opposite"));
  known.view->verdict = Verdict::gathering;
  CHECK(has(known.answer().sentence, "6 of the 20 pairs"));
  CHECK(known.answer().word == "Lost, not shown again");
  known.view->verdict = Verdict::disagreement_shown;
  CHECK(known.answer().word == "No");
}

TEST_CASE("the alarm budget is one sentence") {
  CHECK(budget_words(
            {6,
             5.54,
             {{"agreement_drifting", 1.5}, {"check_standard_unstable", 4}, {"sample_scatter", 0.04}}}) ==
        "By chance alone 5.5 false alerts a year are expected of what is configured (6 are allowed): "
        "agreement drifting "
        "1.5, check standard unstable 4.0, sample scatter 0.04.");
  CHECK(budget_words({}).empty());
}

TEST_CASE("gathering says how many pairs have come, or what the configuration lacks") {
  Known known(Verdict::gathering, Verdict::gathering, 0, 0, 0, 0);
  known.view->window.pairs = 7;
  CHECK(has(known.answer().sentence, "7 of the 20 pairs"));
  auto settings = std::make_shared<Settings>(*known.story.snapshot.settings);
  settings->measurands[1].allowable.reset();
  known.story.snapshot.settings = settings;
  CHECK(has(known.answer().sentence, "names no allowable difference"));
}

TEST_CASE("a difference that rounds to nothing has no direction") {
  const Known known(Verdict::agreement_shown, Verdict::agreement_shown, -0.0001, -0.01, 0.01, 1.0);
  CHECK(has(known.answer().sentence, "reads the same as line1"));
}

TEST_CASE("the answer for several comparisons is the worst one's, and it names those that decide it") {
  const Answer no = overall_answer(mill::drifting().snapshot);
  CHECK(no.kind == AnswerKind::no);
  CHECK(has(no.sentence, "Protein: at 13"));
  CHECK(has(no.more.at(0), "1 of 2 comparisons disagree: Protein."));
  const Answer yes = overall_answer(mill::agreeing().snapshot);
  CHECK(yes.kind == AnswerKind::yes);
  CHECK(overall_answer(mill::gathering().snapshot).kind == AnswerKind::not_yet);
  CHECK(overall_answer(mill::starting().snapshot).kind == AnswerKind::starting);
  const Answer mixed = overall_answer(mill::many(40).snapshot);
  CHECK(mixed.word == "Not all");
  CHECK(has(mixed.more.at(0), "4 of 40 comparisons do not show agreement"));
}

TEST_CASE("a disagreement with a small bias is not hidden behind a larger bias that decides nothing") {
  Known known(Verdict::disagreement_shown, Verdict::disagreement_shown, 0.22, 0.21, 0.23, 0.2);
  auto other = std::make_shared<ComparisonView>(*known.view);
  other->verdict = Verdict::inconclusive;
  other->levels[0].verdict = Verdict::inconclusive;
  other->levels[0].bias = 0.9;
  known.story.snapshot.comparisons[0] = other;
  CHECK(has(overall_answer(known.story.snapshot).sentence, "Protein:"));
}

TEST_CASE("lambda is shown with which way up it is") {
  const mill::Story story = mill::agreeing();
  const std::string words = error_words(comparison_scene(story.snapshot, ComparisonIndex{1}));
  CHECK(has(words, "lambda = var(error of line1) / var(error of line2) = 0.81"));
}

TEST_CASE("an unstable chart says how far the level moved and between when") {
  const mill::Story story = mill::drifting();
  const ChartScene scene = chart_scene(story.snapshot, ChartIndex{5});
  REQUIRE(scene.view.state == ChartState::unstable);
  const std::string words = chart_words(scene);
  CHECK(has(words, "Unstable: the level shifted by +0.270 g/100 g; begun between "));
  CHECK(has(words, "Change score 6.20 of 4.08."));
}

TEST_CASE("a chart without readings, and one that learns, say so") {
  CHECK(has(chart_words(chart_scene(mill::empty().snapshot, ChartIndex{0})), "No reading yet"));
  CHECK(
      has(chart_words(chart_scene(mill::gathering().snapshot, ChartIndex{0})), "Learning: 6 of 30 readings"));
}

TEST_CASE("an unknown warning is shown as it is, not dropped") {
  CHECK(warning_words("something_new") == "something new");
  CHECK(has(warning_words("heavy_tails"), "false signals"));
}
