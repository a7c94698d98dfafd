// The words that age changes: an answer is never shown as current when what it rests on is not.
#include <doctest/doctest.h>

#include "daemon/render/page_freshness.hpp"
#include "daemon/render/page_words.hpp"
#include "page_mill.hpp"

namespace {
using namespace agreed;
using namespace std::chrono;

bool has(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

/// Agreement in both comparisons; a pair is due every `every` where given.
mill::Story story_with(std::optional<Duration> every, Duration later) {
  mill::Story story = mill::agreeing();
  auto settings = std::make_shared<Settings>(*story.snapshot.settings);
  for (ComparisonSettings& comparison : settings->comparisons) {
    comparison.overdue = every.has_value();
    comparison.every = every.value_or(Duration{});
  }
  story.snapshot.settings = settings;
  story.snapshot.at += later;
  return story;
}

}  // namespace

TEST_CASE("a yes that newer pairs should have backed long ago becomes out of date, and says what it was") {
  const mill::Story story = story_with(hours(2), days(42));
  const Answer answer = overall_answer(story.snapshot);
  CHECK(answer.kind == AnswerKind::out_of_date);
  CHECK(answer.word == "Out of date");
  CHECK(answer.verdict == "agreement was shown");
  CHECK(has(answer.since, "until 2026-01-31 00:00 UTC (42 days ago)"));
  CHECK(has(answer.sentence, "Nothing is known since. What the pairs said then: "));
  CHECK(has(answer.more.at(0), "Agreement was shown in all 2"));
  const auto page = mill::ask(story, "/comparisons/protein");
  CHECK(has(page->body, "Out of date"));
  CHECK(has(page->body, "overdue; one is due every 2 h."));
}

TEST_CASE("the cadence counts one and a half times over, as for alerts, and quiet hours do not") {
  // The newest pair is of a Saturday, 00:00 UTC; the snapshot was made 2 h 3 min later.
  CHECK(overall_answer(story_with(hours(2), {}).snapshot).kind == AnswerKind::yes);
  CHECK(overall_answer(story_with(hours(2), minutes(56)).snapshot).kind == AnswerKind::yes);
  CHECK(overall_answer(story_with(hours(2), minutes(58)).snapshot).kind == AnswerKind::out_of_date);
  mill::Story story = story_with(hours(2), hours(20));
  story.snapshot.overdue.quiet = {{{false, false, false, false, false, true, true}, hours(0), hours(24)}};
  CHECK(overall_answer(story.snapshot).kind == AnswerKind::yes);
  story.snapshot.at += hours(30);
  CHECK(overall_answer(story.snapshot).kind == AnswerKind::out_of_date);
}

TEST_CASE("without a cadence the answer stands, with its age beside it") {
  const Answer answer = overall_answer(story_with({}, days(42)).snapshot);
  CHECK(answer.kind == AnswerKind::yes);
  CHECK(has(answer.age, "Newest pair of all 2026-01-31 00:00 UTC, 42 days ago."));
}

TEST_CASE("one comparison out of date takes the yes of all away and is named") {
  mill::Story story = story_with({}, days(3));
  auto settings = std::make_shared<Settings>(*story.snapshot.settings);
  settings->comparisons[1].overdue = true;
  settings->comparisons[1].every = hours(8);
  story.snapshot.settings = settings;
  const Answer answer = overall_answer(story.snapshot);
  CHECK(answer.kind == AnswerKind::out_of_date);
  CHECK(answer.word == "Not all current");
  CHECK(has(answer.more.back(), "1 of 2 comparisons are out of date: Protein."));
}

TEST_CASE("disagreement stays disagreement however old it is") {
  mill::Story story = mill::drifting();
  auto settings = std::make_shared<Settings>(*story.snapshot.settings);
  for (ComparisonSettings& comparison : settings->comparisons) {
    comparison.overdue = true;
    comparison.every = hours(2);
  }
  story.snapshot.settings = settings;
  story.snapshot.at += days(9);
  const Answer answer = overall_answer(story.snapshot);
  CHECK(answer.kind == AnswerKind::no);
  CHECK(answer.word == "No, and out of date");
}

TEST_CASE("a service that takes nothing in interrupts a yes and says why; an inbox out of reach is named") {
  mill::Story story = story_with({}, {});
  story.snapshot.ready = false;
  story.snapshot.not_ready = {"journal: the disk is full"};
  const Answer answer = overall_answer(story.snapshot);
  CHECK(answer.kind == AnswerKind::interrupted);
  CHECK(answer.word == "Interrupted");
  CHECK(has(answer.more.back(), "the disk is full"));
  story = story_with({}, {});
  story.snapshot.analyzers[1].inbox = {false, "Permission denied", 0, true};
  CHECK(has(overall_answer(story.snapshot).more.back(),
            "The inbox of line2 cannot be reached (Permission denied)"));
}

TEST_CASE("no pair at all has no age, and a clock that is ahead is told") {
  CHECK(overall_answer(mill::empty().snapshot).age.empty());
  const Instant now = mill::agreeing().snapshot.at;
  CHECK(age_words(now + hours(1), now) == "by a clock that is ahead");
  CHECK(age_words(now + seconds(20), now) == "just now");
  CHECK(age_words(now - hours(5), now) == "5 h ago");
}

TEST_CASE("two pages that differ in the time of their figures alone have one fingerprint") {
  mill::Story story = mill::agreeing();
  const auto first = mill::ask(story, "/");
  story.snapshot.at += seconds(15);
  const auto second = mill::ask(story, "/");
  CHECK(first->fingerprint == second->fingerprint);
  CHECK(first->body != second->body);
  CHECK(has(second->body, "data-tag=\"" + second->fingerprint + "\""));
  story.snapshot.at += hours(3);
  CHECK(mill::ask(story, "/")->fingerprint != first->fingerprint);
}
