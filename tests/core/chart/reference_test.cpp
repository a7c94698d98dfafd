// The mean of a check standard against its reference value.
#include "core/chart/reference.hpp"

#include <doctest/doctest.h>

#include "core/chart/run_length.hpp"
#include "tests/core/chart/scenario.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {
Settings with_reference(double value, std::optional<double> uncertainty) {
  Settings settings = mill(1800);
  settings.charts[0].lots = {{"2026-A", {}, ReferenceValue{value, uncertainty, 2}}};
  return settings;
}

std::vector<Finding> of_bias(const std::vector<Finding>& findings) {
  std::vector<Finding> found;
  for (const Finding& finding : findings)
    if (finding.kind == AlertKind::check_standard_biased) found.push_back(finding);
  return found;
}
}  // namespace

// E_n after ISO 13528:2022 and ISO/IEC 17043 (definition from memory), on made-up results: value, U,
// reference, U.
TEST_CASE("normalised errors") {
  struct Row {
    double x, u_x, reference, u_reference, e_n;
  };
  const Row rows[] = {{10.003, 0.006, 10.0015, 0.003, 0.22360679775},
                      {99.2, 1.5, 101.4, 1.0, -1.220340431696},
                      {5.02, 0.02, 4.95, 0.03, 1.941450686788}};
  for (const Row& row : rows) {
    // U_x = 2 s/sqrt(n).
    const ComparedMean mean{row.x, row.u_x / 2 * 4, 16};
    CHECK(std::abs(*normalised_error(mean, {row.reference, row.u_reference, 2}) - row.e_n) < 1e-11);
    // The same uncertainty, stated with another coverage factor.
    CHECK(std::abs(*normalised_error(mean, {row.reference, row.u_reference * 1.5, 3}) - row.e_n) < 1e-11);
  }
  CHECK_FALSE(normalised_error({10, 0, 5}, {9, {}, 2}));
}

TEST_CASE("a bias is allowed for by the uncertainties of both, from 30 readings on") {
  CHECK(*allowed_bias({10, 0.2, 100}, {9, 0.08, 2}, 4) == doctest::Approx(0.08 + 4 * 0.02));
  CHECK_FALSE(allowed_bias({10, 0.2, 29}, {9, 0.08, 2}, 4));
  CHECK_FALSE(allowed_bias({10, 0.2, 100}, {9, {}, 2}, 4));
}

TEST_CASE("a standard that reads off its reference value is told at the thirtieth reading") {
  const Settings settings = with_reference(11.5, 0.2);
  Fed fed(settings);
  Readings next(501);
  feed(fed, next, 29);
  CHECK(of_bias(fed.findings).empty());
  CHECK_FALSE(fed.chart.view().reference->allowed_bias);
  feed(fed, next, 1);
  const auto told = of_bias(fed.findings);
  REQUIRE(told.size() == 1);
  CHECK(told[0].holds);
  CHECK(told[0].severity == Severity::warning);
  CHECK(told[0].at == hour(30));
  CHECK(told[0].subject == Subject{"line1", "wheat-low", "protein", "", ""});
  const ChartView view = fed.chart.view();
  CHECK(view.reference->biased);
  CHECK(number_of(told[0], "bias") == doctest::Approx(*view.reference->bias));
  CHECK(number_of(told[0], "bias") == doctest::Approx(-1.5).epsilon(0.4));
  const double h = limit_for(Score::level, 1800).h;
  CHECK(number_of(told[0], "limit") == doctest::Approx(0.2 + h * *view.baseline.sd / std::sqrt(30.0)));
  CHECK(number_of(told[0], "readings") == doctest::Approx(30));
  CHECK(text_of(told[0], "unit") == "g/100 g");
  std::vector<Finding> now;
  fed.chart.conditions(now);
  CHECK(of_bias(now).size() == 1);
  feed(fed, next, 20);
  CHECK(of_bias(fed.findings).size() == 1);

  fed.intervene(InterventionKind::recalibrated);
  const auto ended = of_bias(fed.findings);
  REQUIRE(ended.size() == 2);
  CHECK_FALSE(ended[1].holds);
  CHECK(ended[1].resolved_reason == "new_stretch");
  now.clear();
  fed.chart.conditions(now);
  CHECK(now.empty());
}

TEST_CASE("a bias that the readings grow out of ceases to be told") {
  // The level moves to the reference value in steps too small to be a change.
  Settings settings = with_reference(11.2, 0.2);
  settings.charts[0].level_run_length = 1e9;
  Fed fed(settings);
  Readings next(502);
  feed(fed, next, 80, 9.6);
  REQUIRE(of_bias(fed.findings).size() == 1);
  for (int i = 0; i < 400; ++i) fed.read(11.4 + next());
  const auto told = of_bias(fed.findings);
  if (fed.unstable()) fed.intervene(InterventionKind::level_accepted);
  CHECK_FALSE(of_bias(fed.findings).back().holds);
}

TEST_CASE("within the uncertainties, or without any stated, nothing is told") {
  for (const auto& [value, uncertainty] :
       {std::pair<double, std::optional<double>>{10.3, 0.5}, {9.0, std::nullopt}}) {
    const Settings settings = with_reference(value, uncertainty);
    Fed fed(settings);
    Readings next(503);
    feed(fed, next, 300);
    CHECK(of_bias(fed.findings).empty());
    CHECK_FALSE(fed.chart.view().reference->biased);
  }
}

TEST_CASE("with the lot the reference value changes, and its bias with it") {
  Settings settings = with_reference(12, 0.2);
  settings.charts[0].lots.push_back({"2026-B", hour(61), ReferenceValue{20, 0.2, 2}});
  Fed fed(settings);
  Readings next(504);
  feed(fed, next, 60);
  REQUIRE(of_bias(fed.findings).size() == 1);
  feed(fed, next, 40, 20);
  const auto told = of_bias(fed.findings);
  REQUIRE(told.size() == 2);
  CHECK(told[1].at == hour(61));
  CHECK_FALSE(fed.chart.view().reference->biased);
}
