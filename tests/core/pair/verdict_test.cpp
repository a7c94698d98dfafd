#include "core/pair/verdict.hpp"

#include <string>

#include <doctest/doctest.h>

using namespace agreed;

namespace {
using enum Verdict;

// One level's word: I inside, A above, B below (both at the alert confidence too), a/b above/below at 90 %
// only, x across, n not covered although inside.
LevelStatement level_of(char c) {
  switch (c) {
    case 'I':
      return {true, Position::inside, Position::inside};
    case 'A':
      return {true, Position::above, Position::above};
    case 'B':
      return {true, Position::below, Position::below};
    case 'a':
      return {true, Position::above, Position::across};
    case 'b':
      return {true, Position::below, Position::across};
    case 'n':
      return {false, Position::inside, Position::inside};
    case 'N':
      return {false, Position::above, Position::above};
    default:
      return {true, Position::across, Position::across};
  }
}

struct Runner {
  VerdictMachine machine;
  int pairs = 19;
  int hour = 0;

  explicit Runner(std::size_t levels, int confirm = 3) : machine(levels, confirm, 20) {}

  /// One pair whose levels say `word`, one letter each.
  std::optional<Verdict> pair(const std::string& word) {
    std::vector<LevelStatement> levels;
    for (const char c : word) levels.push_back(level_of(c));
    return machine.step({Instant{std::chrono::hours(++hour)}, ++pairs, {}, {}, levels});
  }
  Verdict after(std::initializer_list<const char*> words) {
    for (const char* word : words) pair(word);
    return machine.verdict();
  }
};
}  // namespace

TEST_CASE("gathering below least_pairs, then inconclusive first") {
  Runner run(1);
  run.pairs = 0;
  for (int i = 1; i < 20; ++i) {
    CHECK_FALSE(run.pair("I"));
    CHECK(run.machine.verdict() == gathering);
    CHECK(run.machine.reason() == "too_few_pairs");
  }
  CHECK(run.pair("I") == inconclusive);
  CHECK(run.machine.reason() == "not_confirmed");
  CHECK_FALSE(run.pair("I"));
  CHECK(run.pair("I") == agreement_shown);
  CHECK(run.machine.reason().empty());
  CHECK(run.machine.since() == Instant{std::chrono::hours(22)});
}

TEST_CASE("what the verdict is after some pairs") {
  struct Row {
    const char* fault;
    std::size_t levels;
    std::initializer_list<const char*> words;
    Verdict expected;
    const char* reason;
  };
  const Row rows[] = {
      {"two pairs do not confirm agreement", 1, {"I", "I"}, inconclusive, "not_confirmed"},
      {"an interruption counts anew", 1, {"I", "I", "x", "I", "I"}, inconclusive, "not_confirmed"},
      {"one level of two does not make agreement", 2, {"Ix", "Ix", "Ix", "Ix"}, inconclusive, "not_decided"},
      {"disagreement at one level is enough", 2, {"IA", "IA", "IA"}, disagreement_shown, ""},
      {"90 % outside does not lose agreement", 1, {"a", "a", "a", "a"}, inconclusive, "not_decided"},
      {"disagreement at changing levels is not the same one",
       2,
       {"AI", "IA", "AI", "IA"},
       inconclusive,
       "not_confirmed"},
      {"disagreement on changing sides is not the same one",
       1,
       {"A", "B", "A", "B"},
       inconclusive,
       "not_confirmed"},
      {"a level not covered keeps agreement back", 2, {"In", "In", "In", "In"}, inconclusive, "not_covered"},
      {"a level not covered opens nothing", 1, {"N", "N", "N", "N"}, inconclusive, "not_covered"},
      {"a level not covered does not resolve", 1, {"A", "A", "A", "n", "n"}, disagreement_shown, ""},
      {"one unsupported pair does not end agreement", 1, {"I", "I", "I", "x", "x", "I"}, agreement_shown, ""},
      {"three unsupported pairs end agreement",
       1,
       {"I", "I", "I", "x", "x", "x"},
       inconclusive,
       "not_decided"},
      {"90 % outside does not support disagreement",
       1,
       {"A", "A", "A", "a", "a", "a"},
       inconclusive,
       "not_decided"},
      {"disagreement elsewhere supports it",
       2,
       {"AI", "AI", "AI", "IA", "AI", "IB", "xB"},
       disagreement_shown,
       ""},
      {"straight from agreement to disagreement", 1, {"I", "I", "I", "B", "B", "B"}, disagreement_shown, ""},
      {"straight from disagreement to agreement", 1, {"A", "A", "A", "I", "I", "I"}, agreement_shown, ""},
  };
  for (const Row& row : rows) {
    CAPTURE(row.fault);
    Runner run(row.levels);
    CHECK(run.after(row.words) == row.expected);
    CHECK(run.machine.reason() == row.reason);
  }
}

TEST_CASE("with confirm 1 a verdict moves at once, but not out of gathering") {
  Runner run(1, 1);
  CHECK(run.pair("I") == inconclusive);
  CHECK(run.pair("I") == agreement_shown);
  CHECK(run.pair("A") == disagreement_shown);
  CHECK(run.pair("x") == inconclusive);
}

TEST_CASE("after a change: inconclusive, disagreement from 8 pairs on, agreement from least_pairs on") {
  Runner run(1);
  run.after({"I", "I", "I"});
  run.machine.restart_after_change(Instant{std::chrono::hours(50)});
  CHECK(run.machine.verdict() == inconclusive);
  CHECK(run.machine.reason() == "restarted_after_change");
  run.pairs = 3;
  for (int pairs = 4; pairs < 10; ++pairs) {
    CHECK_FALSE(run.pair("A"));
    CHECK(run.machine.reason() == "restarted_after_change");
  }
  CHECK(run.pair("A") == disagreement_shown);  // the third from pair 8 on

  Runner agreeing(1);
  agreeing.after({"I", "I", "I"});
  agreeing.machine.restart_after_change(Instant{std::chrono::hours(50)});
  agreeing.pairs = 3;
  for (int pairs = 4; pairs < 22; ++pairs) CHECK_FALSE(agreeing.pair("I"));
  CHECK(agreeing.pair("I") == agreement_shown);  // 20, 21, 22
}

TEST_CASE("an intervention begins anew") {
  Runner run(1);
  run.after({"A", "A", "A"});
  run.machine.begin_stretch(Instant{std::chrono::hours(50)});
  CHECK(run.machine.verdict() == gathering);
  run.pairs = 0;
  CHECK_FALSE(run.pair("A"));
  CHECK(run.machine.verdict() == gathering);
}

TEST_CASE("a blocked comparison gathers and says why; a missing fit supports nothing") {
  Runner run(1);
  run.after({"I", "I", "I"});
  const LevelStatement level = level_of('I');
  const Instant now{std::chrono::hours(60)};
  CHECK(run.machine.step({now, 30, "repeatability_not_known", {}, {}}) == gathering);
  CHECK(run.machine.reason() == "repeatability_not_known");
  CHECK(run.machine.step({now, 31, {}, {}, {&level, 1}}) == inconclusive);
  for (int i = 0; i < 2; ++i) (void)run.machine.step({now, 32 + i, {}, {}, {&level, 1}});
  CHECK(run.machine.verdict() == agreement_shown);
  for (int i = 0; i < 3; ++i) (void)run.machine.step({now, 34 + i, {}, "no_direction", {}});
  CHECK(run.machine.verdict() == inconclusive);
  CHECK(run.machine.reason() == "no_direction");
}
