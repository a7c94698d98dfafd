#include "core/plan/wished_budget.hpp"

#include <cmath>
#include <stdexcept>

#include <doctest/doctest.h>

#include "core/plan/false_alerts.hpp"
#include "tests/core/plan/random_plants.hpp"

using namespace agreed;
using namespace agreed::plan;
using namespace agreed::test;
using doctest::Approx;

namespace {
Settings without_own(Settings settings) {
  for (ChartSettings& chart : settings.charts) chart.own_run_length.reset();
  for (ComparisonSettings& comparison : settings.comparisons) comparison.own_run_length.reset();
  return settings;
}

bool has_own(const Settings& settings) {
  for (const ChartSettings& chart : settings.charts)
    if (chart.own_run_length) return true;
  for (const ComparisonSettings& comparison : settings.comparisons)
    if (comparison.own_run_length) return true;
  return false;
}
}  // namespace

TEST_CASE("the allowance found brings the expected number to the wish, on random plants") {
  RandomNormal draw(41);
  int reached = 0, not_reached = 0;
  for (int plant = 0; plant < 400; ++plant) {
    const Settings settings = random_plant(draw);
    const double wished = 0.2 + 8 * draw.uniform();
    const WishedBudget budget = budget_for(settings, wished);
    double fixed = 0;
    for (const FixedRate& rate : budget.fixed) fixed += rate.per_year;
    CHECK(fixed == Approx(budget.fixed_per_year));
    if (budget.false_alerts_per_year) {
      const auto changed = with_allowance(settings, *budget.false_alerts_per_year);
      REQUIRE(changed);
      CHECK(false_alerts(*changed).per_year.value == Approx(wished).epsilon(1e-9));
      ++reached;
    } else {
      CHECK((!budget.any_share || fixed >= wished));
      ++not_reached;
    }
    CHECK((budget.without_own_run_lengths.has_value() || !has_own(settings) || fixed >= wished ||
           !budget.any_share));
    if (budget.without_own_run_lengths) {
      CHECK(has_own(settings));
      const auto changed = with_allowance(without_own(settings), *budget.without_own_run_lengths);
      REQUIRE(changed);
      CHECK(false_alerts(*changed).per_year.value == Approx(wished).epsilon(1e-9));
    }
  }
  // Both happened.
  CHECK(reached > 50);
  CHECK(not_reached > 50);
}

TEST_CASE("own run lengths that exceed the wish are named, most first, with what would be an even share") {
  Settings settings = harrow_mill();
  settings.charts.assign(3, settings.charts[0]);
  settings.charts[0].own_run_length = 1095;  // two scores, one a year each
  settings.charts[1].method = ChartMethod::classical;
  settings.charts[1].expected.readings = 365;  // three a year
  settings.comparisons[0].own_run_length = 4380;
  settings = shared(settings, 10);
  const WishedBudget budget = budget_for(settings, 4);
  CHECK_FALSE(budget.false_alerts_per_year);
  CHECK(budget.any_share);
  CHECK(budget.fixed_per_year == Approx(2 + 3 + 2));
  REQUIRE(budget.fixed.size() == 3);
  CHECK(budget.fixed[0].chart == ChartIndex{1});
  CHECK(budget.fixed[0].classical);
  CHECK(budget.fixed[0].even_run_length == 0);
  CHECK(budget.fixed[1].chart == ChartIndex{0});
  CHECK(budget.fixed[2].comparison == ComparisonIndex{0});
  // Four items, so one a year each: chart 1,095 readings over one half; comparison 4,380 pairs, warnings half
  // of it.
  CHECK(budget.fixed[1].even_run_length == Approx(2190));
  CHECK(budget.fixed[2].even_run_length == Approx(8760));
  // Without own run lengths: 1 is left to two charts' and one comparison's shares of four.
  REQUIRE(budget.without_own_run_lengths);
  CHECK(*budget.without_own_run_lengths == Approx(4.0 / 3));
}

TEST_CASE("where nothing lives on the allowance no allowance helps") {
  Settings settings = harrow_mill();
  settings.charts[0].own_run_length = 5000;
  settings.comparisons[0].own_run_length = 20'000;
  const WishedBudget budget = budget_for(shared(settings, 20), 15);
  CHECK_FALSE(budget.any_share);
  CHECK_FALSE(budget.false_alerts_per_year);
  REQUIRE(budget.without_own_run_lengths);
  CHECK(*budget.without_own_run_lengths == Approx(15));
}

TEST_CASE("an allowance that is overspent is none, a wish that is none refused") {
  Settings settings = harrow_mill();
  settings.charts[0].own_run_length = 1095;
  settings = shared(settings, 6);
  CHECK_FALSE(with_allowance(settings, 1.9));
  REQUIRE(with_allowance(settings, 3));
  CHECK(with_allowance(settings, 3)->alarm_budget.allowed_per_year == 3);
  CHECK_THROWS_AS((void)budget_for(settings, 0), std::invalid_argument);
  CHECK_THROWS_AS((void)budget_for(settings, std::nan("")), std::invalid_argument);
}
