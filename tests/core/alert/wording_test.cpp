#include "core/alert/wording.hpp"

#include <limits>
#include <random>
#include <string>

#include <doctest/doctest.h>

#include "tests/core/alert/harrow_mill.hpp"

using namespace agreed;
using test::at_hour;

namespace {

Alert worded(Alert alert) {
  write_words(alert, *test::harrow_mill());
  return alert;
}

Alert chart_alert(const std::string& pattern, Details details) {
  Alert alert;
  alert.kind = AlertKind::check_standard_unstable;
  alert.subject = {"line2", "wheat-low", "protein", "", ""};
  alert.started_at = at_hour(0);
  alert.started_between = Period{at_hour(-8), at_hour(16)};
  alert.details = std::move(details);
  alert.details.insert(alert.details.begin(), {"pattern", pattern});
  return alert;
}

Alert pair_alert(AlertKind kind, Severity severity, Details details) {
  Alert alert;
  alert.kind = kind;
  alert.subject.comparison = "protein";
  alert.severity = severity;
  alert.details = std::move(details);
  return alert;
}

Alert line1_alert(AlertKind kind, Details details) {
  Alert alert;
  alert.kind = kind;
  alert.subject.analyzer = "line1";
  alert.details = std::move(details);
  return alert;
}

}  // namespace
#include <cstdio>
TEST_CASE("dump") {
  for (auto& a : {
           worded(chart_alert("single_reading", {{"value", 11.02},
                                                 {"mean_before", 10.6204},
                                                 {"limit_lower", 10.53},
                                                 {"limit_upper", 10.71},
                                                 {"score", 4.613},
                                                 {"limit", 4.08}})),
           worded(chart_alert("shift", {{"value", 10.76},
                                        {"mean_before", 10.6204},
                                        {"mean_after", 10.7434},
                                        {"shift", 0.123},
                                        {"limit_lower", 10.53},
                                        {"limit_upper", 10.71},
                                        {"score", 4.613},
                                        {"limit", 4.08},
                                        {"readings_since", 4.0}})),
           worded(chart_alert(
               "scatter",
               {{"value", 10.76}, {"sd", 0.0447}, {"ratio_of_sd", 2.11}, {"score", 3.9}, {"limit", 3.62}})),
           worded(pair_alert(AlertKind::agreement_lost, Severity::critical,
                             {{"level", 13.0},
                              {"bias", 0.3501},
                              {"low", 0.25},
                              {"high", 0.45},
                              {"allowable", 0.2},
                              {"confidence", 0.999},
                              {"slope", 1.0123},
                              {"intercept", 0.1904},
                              {"pairs", 40.0}})),
           worded(pair_alert(AlertKind::agreement_drifting, Severity::warning,
                             {{"score", 4.4}, {"limit", 4.31}, {"shift", 0.12}, {"pairs", 66.0}})),
           worded(pair_alert(AlertKind::agreement_drifting, Severity::critical,
                             {{"score", 5.4},
                              {"limit", 4.83},
                              {"shift", -0.12},
                              {"pairs", 66.0},
                              {"moved", "y"},
                              {"probability", 0.97}})),
           worded(pair_alert(
               AlertKind::pair_outlier, Severity::notice,
               {{"sample", "S-104"}, {"x", 11.2}, {"y", 12.9}, {"residual", 6.07}, {"p", 0.00003425}})),
           worded(line1_alert(AlertKind::file_rejected, {{"file", "a.csv"},
                                                         {"line", 3.0},
                                                         {"column", 7.0},
                                                         {"reason", "a number was expected, found \"1,5\""},
                                                         {"rows", 1.0}})),
           worded(line1_alert(
               AlertKind::readings_conflict,
               {{"item", "wheat-low"}, {"measurand", "protein"}, {"stored", 10.6}, {"value", 10.7}})),
           worded(line1_alert(AlertKind::inbox_unreachable,
                              {{"inbox", "drop/line1"}, {"reason", "Permission denied"}})),
           worded(chart_alert("", {})),
           worded(line1_alert(AlertKind::check_overdue, {})),
       })
    std::printf("## %s\n%s\n\n", a.title.c_str(), a.text.c_str());
}
