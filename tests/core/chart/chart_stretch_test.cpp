// What begins a new stretch: interventions, an accepted level, a new lot.
#include <doctest/doctest.h>

#include "core/chart/chart.hpp"
#include "tests/core/chart/scenario.hpp"

using namespace agreed;
using namespace agreed::test;

TEST_CASE("an intervention begins a new stretch and clears the alert") {
  Scenario s(27);
  feed(s.fed, s.next, 20, 14);
  REQUIRE(s.fed.unstable());
  s.fed.intervene(InterventionKind::recalibrated);
  CHECK_FALSE(s.fed.unstable());
  CHECK_FALSE(s.fed.findings.back().holds);
  CHECK(s.fed.findings.back().resolved_reason == "new_stretch");
  const std::size_t told = s.fed.findings.size();
  feed(s.fed, s.next, 10, 14);
  CHECK(s.fed.findings.size() == told);
  const ChartView view = s.fed.chart.view();
  CHECK(view.baseline.readings == 10);
  CHECK(view.state == ChartState::learning);
  CHECK(view.points[120].starts_stretch);
  CHECK_FALSE(view.points[120].moving_range);
  CHECK_FALSE(view.points[120].score);
  REQUIRE(view.marks.size() == 1);
  CHECK(view.marks[0].what == "recalibrated");
}

TEST_CASE("interventions that do not concern the chart change nothing") {
  Scenario s(28);
  const std::string before = dump(s.fed.chart.view());
  std::vector<Finding>& findings = s.fed.findings;
  s.fed.chart.add(Intervention{hour(100), {0}, {}, {}, InterventionKind::noted, ""}, findings);
  s.fed.chart.add(Intervention{hour(100), {1}, {}, {}, InterventionKind::repaired, ""}, findings);
  s.fed.chart.add(Intervention{hour(100), {0}, {}, MeasurandIndex{1}, InterventionKind::repaired, ""},
                  findings);
  s.fed.chart.add(Intervention{hour(100), {0}, StandardIndex{0}, {}, InterventionKind::level_accepted, ""},
                  findings);
  CHECK(dump(s.fed.chart.view()) == before);
  CHECK(findings.empty());
  s.fed.chart.add(
      Intervention{hour(100), {0}, StandardIndex{1}, MeasurandIndex{0}, InterventionKind::repaired, ""},
      findings);
  CHECK(s.fed.chart.view().baseline.readings == 0);
}

TEST_CASE("accepting a level begins the stretch at the estimated start, with the readings since") {
  Scenario s(29);
  feed(s.fed, s.next, 25, 14);
  REQUIRE(s.fed.unstable());
  s.fed.intervene(InterventionKind::level_accepted);
  CHECK(s.fed.findings.back().resolved_reason == "new_stretch");
  CHECK(s.fed.findings.back().at == hour(125));
  const ChartView view = s.fed.chart.view();
  CHECK(view.baseline.readings == 25);
  CHECK(*view.baseline.center == doctest::Approx(14).epsilon(0.05));
  CHECK(view.points[100].starts_stretch);
  CHECK(*view.baseline.from == hour(101));
  CHECK(view.marks[0].at == hour(101));
  feed(s.fed, s.next, 30, 14);
  CHECK_FALSE(s.fed.unstable());
}

TEST_CASE("accepting a level while nothing is open begins the stretch at its own time") {
  Scenario s(30);
  s.fed.intervene(InterventionKind::level_accepted);
  CHECK(s.fed.findings.empty());
  CHECK(s.fed.chart.view().baseline.readings == 0);
  CHECK(s.fed.chart.view().marks[0].at == hour(100));
}

TEST_CASE("a new lot begins a new stretch") {
  Settings settings = mill(1800);
  settings.charts[0].lots.push_back({"2026-B", hour(51), ReferenceValue{11.9, 0.2, 2}});
  Fed fed(settings);
  Readings next(31);
  feed(fed, next, 50);
  CHECK(fed.chart.view().lot == "2026-A");
  CHECK_FALSE(fed.chart.view().reference);
  feed(fed, next, 40, 12);
  CHECK(fed.findings.empty());
  const ChartView view = fed.chart.view();
  CHECK(view.lot == "2026-B");
  CHECK(view.baseline.readings == 40);
  CHECK(view.points[50].starts_stretch);
  CHECK(view.marks[0].what == "lot 2026-B");
  REQUIRE(view.reference);
  CHECK(*view.reference->bias == doctest::Approx(*view.baseline.center - 11.9));
  const double u = std::sqrt(*view.baseline.sd * *view.baseline.sd / 40 + 0.1 * 0.1);
  CHECK(*view.reference->normalised_error == doctest::Approx(*view.reference->bias / (2 * u)));
}
