#include "core/plan/proof_search.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include <doctest/doctest.h>

#include "core/plan/proof_simulation.hpp"
#include "tests/core/plan/support.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;
using doctest::Approx;

namespace {
const Trials kTrials{1500, 1, 3};

ProofNeeds needs_of(const Settings& settings, const PairConditions& c, const ProofWish& wish = {}) {
  ProofSearch search(settings, {0}, c, wish, kTrials);
  int steps = 0;
  double done = search.share_done();
  while (search.step()) {
    CHECK(search.share_done() >= done);
    done = search.share_done();
    REQUIRE(++steps < 40);
  }
  CHECK(search.share_done() == 1);
  CHECK_FALSE(search.step());
  return search.needs();
}
}  // namespace

TEST_CASE("the pairs found have the power wished, and fewer have not") {
  const Settings settings = harrow_mill();
  for (const double power : {0.8, 0.9}) {
    const ProofNeeds needs = needs_of(settings, conditions(), {power, 0});
    REQUIRE(needs.pairs);
    CHECK(needs.reason.empty());
    MESSAGE(*needs.pairs << " pairs: " << needs.power.value << " +- " << needs.power.standard_error
                         << ", closed form " << needs.closed_form);
    CHECK(needs.power.value >= power);
    CHECK(needs.power.value < power + 0.03);
    // The level farther from the middle of the samples decides.
    CHECK(needs.level == 10.5);
    // With other luck.
    const Trials other{3000, 1, 99};
    const Simulated again = simulated_proof_power(settings, {0}, conditions(), 0, *needs.pairs, other);
    CHECK(again.value > power - 0.03);
    CHECK(simulated_proof_power(settings, {0}, conditions(), 0, *needs.pairs * 85 / 100, other).value <
          power - 0.01);
  }
}

TEST_CASE("errors so small that the least number of pairs is enough") {
  const ProofNeeds needs = needs_of(harrow_mill(), conditions(0.01, 0.01));
  CHECK(needs.pairs == 22);
  CHECK(needs.power.value > 0.9);
}

TEST_CASE("a window that is too small: what would do") {
  Settings settings = harrow_mill();
  settings.comparisons[0].window_pairs = 60;
  const PairConditions c = conditions(0.2, 0.2);
  const ProofNeeds needs = needs_of(settings, c);
  CHECK_FALSE(needs.pairs);
  CHECK(needs.reason == no_proof::window_too_small);
  CHECK(needs.capacity == 60);
  CHECK(needs.power.value < 0.9);
  REQUIRE(needs.pairs_in_larger_window);
  REQUIRE(needs.sd_factor);
  REQUIRE(needs.allowable_factor);
  // Without bias only their ratio counts.
  CHECK(*needs.sd_factor * *needs.allowable_factor == Approx(1).epsilon(0.01));
  CHECK(*needs.sd_factor < 1);
  const Trials other{2000, 1, 77};
  Settings larger = settings;
  larger.comparisons[0].window_pairs = *needs.pairs_in_larger_window + 10;
  CHECK(simulated_proof_power(larger, {0}, c, 0, *needs.pairs_in_larger_window, other).value > 0.87);
  CHECK(simulated_proof_power(settings, {0}, c.with_errors(*needs.sd_factor), 0, 60, other).value > 0.87);
  CHECK(simulated_proof_power(settings, {0}, c.with_errors(1.15 * *needs.sd_factor), 0, 60, other).value <
        0.87);
  settings.measurands[0].allowable->absolute = 0.1 * *needs.allowable_factor;
  CHECK(simulated_proof_power(settings, {0}, c, 0, 60, other).value > 0.87);
}

TEST_CASE("the window's age counts as well as its room") {
  Settings settings = harrow_mill();
  settings.comparisons[0].window_age = hours(50);
  CHECK(needs_of(settings, conditions(0.01, 0.01)).capacity == 26);
  settings.comparisons[0].window_age = hours(24);
  const ProofNeeds needs = needs_of(settings, conditions(0.01, 0.01));
  CHECK(needs.capacity == 13);
  CHECK(needs.reason == no_proof::window_too_small);
  CHECK(needs.pairs_in_larger_window == 22);
  CHECK_FALSE(needs.sd_factor);
  CHECK_FALSE(needs.allowable_factor);
}

TEST_CASE("what makes every number of pairs useless is said") {
  Settings settings = harrow_mill();
  const ProofNeeds biased = needs_of(settings, conditions(0.02, 0.02), {0.9, -0.12});
  CHECK(biased.reason == no_proof::bias_as_large_as_allowable);
  CHECK(biased.level == 10.5);
  REQUIRE(biased.allowable_factor);
  CHECK(*biased.allowable_factor > 1.2);
  CHECK(*biased.allowable_factor < 1.4);
  CHECK_FALSE(biased.sd_factor);
  PairConditions narrow = conditions(0.02, 0.02);
  narrow.samples = SampleValues::evenly(11, 15);
  const ProofNeeds uncovered = needs_of(settings, narrow);
  CHECK(uncovered.reason == no_proof::not_covered);
  CHECK(uncovered.level == 10.5);
  CHECK_FALSE(uncovered.pairs);
  settings.measurands[0].allowable.reset();
  CHECK(needs_of(settings, conditions()).reason == no_proof::no_allowable_difference);
  settings.measurands[0].decision_levels.clear();
  CHECK(needs_of(settings, conditions()).reason == no_proof::no_decision_levels);
}

TEST_CASE("levels reached by few samples are waited for") {
  // One sample in 101 lies at or below 9.03: some 200 pairs hold one with 90 %.
  Settings settings = harrow_mill();
  settings.comparisons[0].window_pairs = 1000;
  settings.measurands[0].decision_levels = {9.03, 12};
  const ProofNeeds needs = needs_of(settings, conditions(0.005, 0.005));
  REQUIRE(needs.pairs);
  CHECK(*needs.pairs > 100);
  CHECK(needs.power.value >= 0.9);
}

TEST_CASE("wishes that are none are refused") {
  const auto search = [](const ProofWish& wish) {
    ProofSearch(harrow_mill(), {0}, conditions(), wish, kTrials);
  };
  CHECK_THROWS_AS(search({0, 0}), std::invalid_argument);
  CHECK_THROWS_AS(search({1, 0}), std::invalid_argument);
  CHECK_THROWS_AS(search({0.9, std::nan("")}), std::invalid_argument);
}
