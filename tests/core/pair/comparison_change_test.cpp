// What the pairs know of an open change: the split, and how far back results are in doubt.
#include "core/pair/comparison_change.hpp"

#include <algorithm>

#include "core/pair/agreement_record.hpp"
#include "tests/core/pair/harrow_mill.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
/// A mill that writes down the verdict at every pair.
struct WatchedMill {
  struct Step {
    std::string sample;
    Instant at;
    bool shown;
  };

  explicit WatchedMill(std::uint64_t seed, const Settings& settings = harrow_mill()) : mill(seed, settings) {}

  void run(int n, double shift = 0) {
    for (int i = 0; i < n; ++i) {
      mill.run(1, shift);
      steps.push_back({"S-" + std::to_string(mill.pairs), mill.now,
                       mill.comparison.verdict() == Verdict::agreement_shown});
    }
  }
  /// The look-back by its definition, from everything.
  LookBackView expected(Instant earliest_start) const {
    LookBackView view;
    auto from = steps.begin();
    for (auto step = steps.begin(); step != steps.end(); ++step)
      if (step->at < earliest_start && step->shown) {
        view.from_agreement = true;
        from = step;
      }
    view.from = from->at;
    view.to = steps.back().at;
    for (auto step = view.from_agreement ? from + 1 : from; step != steps.end(); ++step) {
      ++view.pairs;
      view.samples.push_back(step->sample);
    }
    if (view.samples.size() > 1000) view.samples.erase(view.samples.begin(), view.samples.end() - 1000);
    view.hours = static_cast<double>((view.to - view.from).count()) / 3'600'000.0;
    return view;
  }

  Mill mill;
  std::vector<Step> steps;
};
}  // namespace

TEST_CASE("nothing is in doubt while nothing is open") {
  WatchedMill watched(1);
  CHECK_FALSE(watched.mill.comparison.change());
  watched.run(100);
  CHECK_FALSE(watched.mill.comparison.change());
}

TEST_CASE("a step: the split, and the look-back to the last pair before it at which agreement was shown") {
  WatchedMill watched(3);
  watched.run(100);
  const Instant step_at = watched.mill.now + std::chrono::hours(2);
  for (int pairs = 1; pairs <= 60; ++pairs) {
    watched.run(1, 0.2);
    const auto change = watched.mill.comparison.change();
    if (!change) continue;
    REQUIRE(change->split);
    CHECK(change->split->started_at == step_at);
    CHECK(change->split->before.n == 100);
    CHECK(change->split->after.n == pairs);
    CHECK(change->look_back == watched.expected(change->split->started_between.first));
    CHECK(change->look_back.from_agreement);
  }
  REQUIRE(watched.mill.comparison.change());
  watched.mill.intervene();
  watched.run(25);
  CHECK_FALSE(watched.mill.comparison.change());
}

TEST_CASE("the look-back is exact whatever the verdict does before and after") {
  int checked = 0, from_start = 0, within_run = 0;
  for (std::uint64_t seed = 100; seed < 130; ++seed) {
    Settings settings = harrow_mill();
    settings.comparisons[0].window_pairs = 40;
    settings.comparisons[0].warning_run_length = 200;
    settings.measurands[0].allowable->absolute = seed % 3 == 0 ? 0.02 : 0.04;
    WatchedMill watched(seed, settings);
    const int before = seed % 5 == 0 ? 12 : 150;
    for (int pair = 0; pair < before + 80; ++pair) {
      watched.run(1, pair < before ? 0.0 : 0.03 + 0.02 * static_cast<double>(seed % 3));
      const auto change = watched.mill.comparison.change();
      if (!change || !change->split) continue;
      CAPTURE(seed);
      CAPTURE(pair);
      const LookBackView expected = watched.expected(change->split->started_between.first);
      REQUIRE(change->look_back == expected);
      ++checked;
      from_start += expected.from_agreement ? 0 : 1;
      within_run += expected.from_agreement && change->look_back.pairs > 1 ? 1 : 0;
    }
  }
  CHECK(checked > 500);
  CHECK(from_start > 20);
  CHECK(within_run > 100);
}

TEST_CASE("agreement never shown: everything is in doubt, the newest thousand samples are listed") {
  Settings settings = harrow_mill();
  WatchedMill watched(5, settings);
  watched.run(1300, 0.3);  // biased from the first pair on, without any change
  const auto change = watched.mill.comparison.change();
  REQUIRE(change);
  CHECK_FALSE(change->split);
  CHECK(change->look_back == watched.expected(Instant::max()));
  CHECK_FALSE(change->look_back.from_agreement);
  CHECK(change->look_back.pairs == 1300);
  CHECK(change->look_back.samples.size() == 1000);
  CHECK(change->look_back.samples.front() == "S-301");
}

TEST_CASE("a change that stays open for long keeps its beginning") {
  WatchedMill watched(6);
  watched.run(300);
  watched.run(1500, 0.3);
  const auto change = watched.mill.comparison.change();
  REQUIRE(change);
  REQUIRE(change->split);
  CHECK(change->split->before.n == 300);
  CHECK(change->split->after.n == 500);  // the newest that are kept
  CHECK(change->look_back == watched.expected(change->split->started_between.first));
}

TEST_CASE("runs of agreement: the one that began before a moment, newest first") {
  AgreementRecord record;
  const auto mark = [](int n) { return PairMark{Instant{std::chrono::hours(n)}, n}; };
  CHECK_FALSE(record.run_before(Instant::max()));
  for (int n = 5; n <= 9; ++n) record.shown(mark(n), n == 5);
  record.shown(mark(20), true);
  CHECK_FALSE(record.run_before(mark(5).at));
  CHECK(record.run_before(mark(6).at)->last == mark(9));
  CHECK(record.run_before(mark(20).at)->first == mark(5));
  CHECK(record.run_before(mark(21).at)->first == mark(20));
}
