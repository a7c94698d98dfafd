// What an intervention did, and how far the level is from that of the first stretch.
#include <doctest/doctest.h>

#include "core/chart/mean_level.hpp"
#include "tests/core/chart/scenario.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
MeanLevel level_of(const std::vector<double>& values) {
  const Moments moments(values, 0, values.size());
  const auto n = static_cast<std::int64_t>(values.size());
  return {hour(0),
          hour(n),
          n,
          static_cast<double>(moments.mean),
          static_cast<double>(moments.squares) / static_cast<double>(n - 1),
          n - 1};
}
}  // namespace

// Worked out independently with numpy and scipy (Welch's interval).
TEST_CASE("the difference of two means and its interval") {
  const auto found = difference_of(level_of({10.61, 10.63, 10.60, 10.64, 10.62, 10.65}),
                                   level_of({10.66, 10.70, 10.64, 10.69, 10.71}));
  REQUIRE(found);
  CHECK(found->difference == doctest::Approx(0.055).epsilon(1e-9));
  CHECK(found->low == doctest::Approx(0.018819046967936105).epsilon(1e-7));
  CHECK(found->high == doctest::Approx(0.09118095303206333).epsilon(1e-7));
  CHECK(found->confidence == doctest::Approx(0.95));
}

TEST_CASE("no interval without scatter or degrees of freedom") {
  CHECK_FALSE(difference_of(level_of({1, 1, 1}), level_of({2, 2})));
  MeanLevel one = level_of({1, 2});
  one.degrees = 0;
  CHECK_FALSE(difference_of(one, level_of({1, 2, 3})));
}

TEST_CASE("the effect of an intervention is told from the fifth reading after it") {
  Settings settings = mill(1800);
  settings.measurands[0].allowable = AllowableDifference{0.5, {}};
  Fed fed(settings);
  Readings next(401);
  feed(fed, next, 40);
  REQUIRE(fed.findings.empty());
  CHECK_FALSE(fed.chart.view().intervention_effect);
  fed.intervene(InterventionKind::recalibrated);
  feed(fed, next, 4, 12);
  CHECK_FALSE(fed.chart.view().intervention_effect);
  CHECK_FALSE(fed.chart.view().since_first);
  feed(fed, next, 16, 12);
  const ChartView view = fed.chart.view();
  REQUIRE(view.intervention_effect);
  const EffectView& effect = *view.intervention_effect;
  CHECK(effect.what == "recalibrated");
  CHECK(effect.at == hour(40));
  CHECK(effect.readings_before == 40);
  CHECK(effect.readings_after == 20);
  CHECK(effect.difference == doctest::Approx(2).epsilon(0.3));
  CHECK(effect.difference == doctest::Approx(effect.mean_after - effect.mean_before));
  CHECK(*effect.low < effect.difference);
  CHECK(*effect.high > effect.difference);
  CHECK(*effect.allowable == doctest::Approx(0.5));
  REQUIRE(view.since_first);
  CHECK(view.since_first->difference == doctest::Approx(effect.difference));
  CHECK(view.since_first->at == hour(1));
}

TEST_CASE("after a shift that stood the effect counts from it, and since_first from the beginning") {
  Scenario s(406);
  feed(s.fed, s.next, 30, 14);
  REQUIRE(s.fed.chart.view().pattern == "shift");
  s.fed.intervene(InterventionKind::repaired);
  feed(s.fed, s.next, 20, 10.5);
  const ChartView view = s.fed.chart.view();
  CHECK(view.intervention_effect->readings_before == 30);
  CHECK(view.intervention_effect->difference == doctest::Approx(-3.5).epsilon(0.2));
  CHECK(view.since_first->readings_before == 100);
  CHECK(view.since_first->difference == doctest::Approx(0.5).epsilon(0.8));
}

TEST_CASE("an accepted level is compared with the one before it") {
  Scenario s(403);
  feed(s.fed, s.next, 25, 14);
  s.fed.intervene(InterventionKind::level_accepted);
  const ChartView view = s.fed.chart.view();
  REQUIRE(view.intervention_effect);
  CHECK(view.intervention_effect->what == "level_accepted");
  CHECK(view.intervention_effect->readings_after == 25);
  CHECK(view.intervention_effect->difference == doctest::Approx(4).epsilon(0.2));
  CHECK(*view.intervention_effect->low > 3);
}

TEST_CASE("a second intervention is compared with what lay between, since_first with the first stretch") {
  Scenario s(404);
  s.fed.intervene(InterventionKind::recalibrated);
  feed(s.fed, s.next, 10, 12);
  s.fed.intervene(InterventionKind::consumable_changed);
  s.fed.intervene(InterventionKind::repaired);  // at once: nothing lay between
  feed(s.fed, s.next, 10, 13);
  const ChartView view = s.fed.chart.view();
  CHECK(view.intervention_effect->what == "repaired");
  CHECK(view.intervention_effect->readings_before == 10);
  CHECK(view.intervention_effect->difference == doctest::Approx(1).epsilon(0.8));
  CHECK(view.since_first->readings_before == 100);
  CHECK(view.since_first->difference == doctest::Approx(3).epsilon(0.4));
}

TEST_CASE("levels of two lots are not compared") {
  Settings settings = mill(1800);
  settings.charts[0].lots.push_back({"2026-B", hour(51), {}});
  Fed fed(settings);
  Readings next(405);
  feed(fed, next, 40);
  fed.intervene(InterventionKind::recalibrated);
  feed(fed, next, 10);
  CHECK(fed.chart.view().since_first);
  feed(fed, next, 20, 20);
  CHECK_FALSE(fed.chart.view().intervention_effect);
  CHECK_FALSE(fed.chart.view().since_first);
}
