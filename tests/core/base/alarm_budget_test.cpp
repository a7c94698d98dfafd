#include "core/base/alarm_budget.hpp"

#include <cmath>
#include <limits>
#include <random>
#include <stdexcept>
#include <vector>

#include <doctest/doctest.h>

using namespace agreed;
using doctest::Approx;
using std::chrono::hours;

namespace {

BudgetEntry every(Duration cadence, std::optional<double> own = std::nullopt) {
  return {cadence, own};
}

/// Expected false alerts a year, counted anew from cadences and run lengths.
double recount(const BudgetShares& shares, const std::vector<BudgetEntry>& charts,
               const std::vector<BudgetEntry>& comparisons) {
  double sum = 0;
  for (std::size_t i = 0; i < charts.size(); ++i) {
    const double n = 365.0 * 86'400'000.0 / static_cast<double>(charts[i].every.count());
    sum += n / shares.charts[i].level + n / shares.charts[i].precision;
  }
  for (std::size_t i = 0; i < comparisons.size(); ++i) {
    const double n = 365.0 * 86'400'000.0 / static_cast<double>(comparisons[i].every.count());
    const auto& lengths = shares.comparisons[i];
    sum += n / lengths.warning + n / lengths.outlier + n / lengths.scatter;
  }
  return sum;
}

}  // namespace

TEST_CASE("a chart read three times a day with a share of 0.6 a year gets 3,650 readings for each score") {
  // The worked example of the statistics design, 3.0: 8 charts and 2 comparisons share 6 a year.
  const std::vector<BudgetEntry> charts(8, every(hours(8)));
  const std::vector<BudgetEntry> comparisons(2, every(hours(2)));
  const auto shares = share_alarm_budget(6, charts, comparisons);
  CHECK(shares.share_per_year == Approx(0.6).epsilon(1e-12));
  for (const auto& chart : shares.charts) {
    CHECK(chart.level == Approx(3650).epsilon(1e-12));
    CHECK(chart.precision == Approx(3650).epsilon(1e-12));
  }
  for (const auto& comparison : shares.comparisons) {
    CHECK(comparison.warning == Approx(14'600).epsilon(1e-12));  // 4,380 pairs a year over 0.3
    CHECK(comparison.outlier == Approx(29'200).epsilon(1e-12));
    CHECK(comparison.scatter == Approx(29'200).epsilon(1e-12));
  }
  CHECK(shares.budget.allowed_per_year == Approx(6));
  CHECK(shares.budget.expected_per_year == Approx(6).epsilon(1e-12));
  CHECK(shares.budget.by_kind.size() == 4);
  CHECK(shares.budget.by_kind.at("check_standard_unstable") == Approx(4.8).epsilon(1e-12));
  CHECK(shares.budget.by_kind.at("agreement_drifting") == Approx(0.6).epsilon(1e-12));
  CHECK(shares.budget.by_kind.at("pair_outlier") == Approx(0.3).epsilon(1e-12));
  CHECK(shares.budget.by_kind.at("sample_scatter") == Approx(0.3).epsilon(1e-12));
  CHECK_FALSE(shares.overspent);
}

TEST_CASE("a test that is not made adds nothing to what is expected and leaves the others their limits") {
  BudgetEntry keeps = every(hours(2)), bare = every(hours(2));
  keeps.tests_outliers = false;
  bare.tests_scatter = false;
  const auto shares = share_alarm_budget(6, {}, {keeps, bare});
  CHECK(shares.budget.expected_per_year == Approx(4.5).epsilon(1e-12));
  CHECK(shares.budget.by_kind.at("agreement_drifting") == Approx(3).epsilon(1e-12));
  CHECK(shares.budget.by_kind.at("pair_outlier") == Approx(0.75).epsilon(1e-12));
  CHECK(shares.budget.by_kind.at("sample_scatter") == Approx(0.75).epsilon(1e-12));
  CHECK(shares.comparisons[0].warning == shares.comparisons[1].warning);
}

TEST_CASE("an own run length is taken off first and the rest shared evenly") {
  // One chart with 730 for each score at 1,095 readings a year uses 3 a year; 3 are left for two others.
  const std::vector<BudgetEntry> charts = {every(hours(8), 730.0), every(hours(8)), every(hours(24))};
  const auto shares = share_alarm_budget(6, charts, {});
  CHECK(shares.taken_per_year == Approx(3).epsilon(1e-12));
  CHECK(shares.share_per_year == Approx(1.5).epsilon(1e-12));
  CHECK(shares.charts[0].level == Approx(730));
  CHECK(shares.charts[0].precision == Approx(730));
  CHECK(shares.charts[1].level == Approx(1460).epsilon(1e-12));
  CHECK(shares.charts[2].level == Approx(365 / 0.75).epsilon(1e-12));
  CHECK(shares.budget.expected_per_year == Approx(6).epsilon(1e-12));
}

TEST_CASE("a comparison's own run length is its warning's; outliers and scatter get twice that each") {
  const auto shares = share_alarm_budget(6, {every(hours(8))}, {every(hours(2), 4380.0)});
  CHECK(shares.comparisons[0].warning == Approx(4380));
  CHECK(shares.comparisons[0].outlier == Approx(8760));
  CHECK(shares.comparisons[0].scatter == Approx(8760));
  CHECK(shares.taken_per_year == Approx(2).epsilon(1e-12));  // 1 + 0.5 + 0.5
  CHECK(shares.share_per_year == Approx(4).epsilon(1e-12));
}

TEST_CASE("none left for the others, or more than all used up, is overspent") {
  const auto used_up = share_alarm_budget(3, {every(hours(8), 730.0), every(hours(8))}, {});
  CHECK(used_up.overspent);
  CHECK(used_up.charts[1].level == Approx(0));
  CHECK(std::isfinite(used_up.budget.expected_per_year));
  CHECK(share_alarm_budget(2.9, {every(hours(8), 730.0)}, {}).overspent);
  CHECK_FALSE(share_alarm_budget(3, {every(hours(8), 730.0)}, {}).overspent);  // exactly all, nobody waits
  CHECK(share_alarm_budget(3, {every(hours(8), 730.0)}, {}).budget.expected_per_year == Approx(3));
}

TEST_CASE("nothing configured spends nothing") {
  const auto shares = share_alarm_budget(6, {}, {});
  CHECK(shares.budget.expected_per_year == Approx(0));
  CHECK(shares.budget.by_kind.empty());
  CHECK_FALSE(shares.overspent);
}

TEST_CASE("whatever is configured, shares and own run lengths together make the allowance") {
  constexpr unsigned kSeed = 20'260'105;
  INFO("seed ", kSeed);
  std::mt19937 random(kSeed);
  std::uniform_int_distribution<int> count(1, 20), minutes(1, 60 * 24 * 40), coin(0, 3);
  for (int run = 0; run < 200; ++run) {
    std::vector<BudgetEntry> charts, comparisons;
    const auto fill = [&](std::vector<BudgetEntry>& entries) {
      for (int i = count(random); i > 0; --i) {
        const Duration cadence = std::chrono::minutes(minutes(random));
        // Own run lengths long enough to use up at most 0.04 a year each, 1.6 of the 6 together.
        const double per_year = 365.0 * 86'400'000.0 / static_cast<double>(cadence.count());
        entries.push_back(every(cadence, coin(random) == 0 ? std::optional(per_year * 50.0) : std::nullopt));
      }
    };
    fill(charts);
    fill(comparisons);
    charts.push_back(every(hours(8)));  // at least one that shares
    const auto shares = share_alarm_budget(6, charts, comparisons);
    REQUIRE_FALSE(shares.overspent);
    CHECK(recount(shares, charts, comparisons) == Approx(6).epsilon(1e-9));
    CHECK(shares.budget.expected_per_year == Approx(6).epsilon(1e-9));
    double kinds = 0;
    for (const auto& [kind, per_year] : shares.budget.by_kind) kinds += per_year;
    CHECK(kinds == Approx(6).epsilon(1e-9));
  }
}

TEST_CASE("cadences, run lengths and allowances that are not positive and finite are refused") {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  const double infinite = std::numeric_limits<double>::infinity();
  for (const double allowance : {0.0, -1.0, nan, infinite})
    CHECK_THROWS_AS((void)share_alarm_budget(allowance, {}, {}), std::invalid_argument);
  for (const double own : {0.0, -5.0, nan, infinite})
    CHECK_THROWS_AS((void)share_alarm_budget(6, {every(hours(8), own)}, {}), std::invalid_argument);
  CHECK_THROWS_AS((void)share_alarm_budget(6, {every(hours(0))}, {}), std::invalid_argument);
  CHECK_THROWS_AS((void)share_alarm_budget(6, {}, {every(hours(-1))}), std::invalid_argument);
}
