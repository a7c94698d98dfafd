// The numbers a monitoring system gets of Harrow Mill.
#include <sstream>

#include <doctest/doctest.h>

#include "daemon/render/metrics_text.hpp"
#include "tests/daemon/http/mill_snapshot.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {

/// The value written behind exactly this sample; "none" when there is no such line.
std::string value_of(const std::string& text, const std::string& sample) {
  std::istringstream lines(text);
  for (std::string line; std::getline(lines, line);)
    if (line.starts_with(sample + " ")) return line.substr(sample.size() + 1);
  return "none";
}

}  // namespace

TEST_CASE("the samples say what the snapshot says") {
  Snapshot snapshot = full_snapshot();
  snapshot.routes = {"engineer", "shift \"A\""};
  Alert alert;
  alert.kind = AlertKind::agreement_lost;
  alert.severity = Severity::critical;
  Alert seen = alert;
  seen.state = AlertState::acknowledged;
  for (const Alert& each : {alert, alert, seen})
    snapshot.alerts.push_back(std::make_shared<const Alert>(each));
  const std::string text =
      metrics_text(snapshot, {{{"engineer", "waiting", 3}, {"former", "undeliverable", 1}}});
  const auto value = [&](const std::string& sample) { return value_of(text, sample); };
  CHECK(value("agreed_start_time_seconds") == "1767603600");
  CHECK(value("agreed_ready") == "1");
  CHECK(value(R"(agreed_overall{agreed_overall="alert"})") == "0");
  CHECK(value(R"(agreed_overall{agreed_overall="attention"})") == "1");
  CHECK(value(R"(agreed_intake_files_total{outcome="done"})") == "3");
  CHECK(value(R"(agreed_intake_readings_total{outcome="accepted"})") == "120");
  CHECK(value("agreed_intake_pending_files") == "2");
  CHECK(value("agreed_intake_last_commit_time_seconds") == "1767603600");
  CHECK(value(R"(agreed_inbox_reachable{analyzer="line2"})") == "0");
  CHECK(value(R"(agreed_analyzer_last_reading_time_seconds{analyzer="line1"})") == "1767603600");
  CHECK(value(R"(agreed_analyzer_last_reading_time_seconds{analyzer="line2"})") == "none");
  CHECK(value(R"(agreed_analyzer_charts{analyzer="line1",state="unstable"})") == "1");
  CHECK(value(R"(agreed_analyzer_charts{analyzer="line2",state="learning"})") == "1");
  CHECK(
      value(
          R"(agreed_comparison_verdict{comparison="protein",agreed_comparison_verdict="agreement_shown"})") ==
      "1");
  CHECK(value(R"(agreed_comparison_verdict{comparison="protein",agreed_comparison_verdict="gathering"})") ==
        "0");
  CHECK(value(R"(agreed_comparison_window_pairs{comparison="protein"})") == "140");
  CHECK(value(R"(agreed_comparison_bias{comparison="protein",level="10.5"})") == "-0.01");
  CHECK(value(R"(agreed_comparison_bias_low{comparison="protein",level="13"})") == "0.01");
  CHECK(value(R"(agreed_comparison_bias_high{comparison="protein",level="13"})") == "0.03");
  CHECK(value(R"(agreed_comparison_allowable_difference{comparison="protein",level="13"})") == "0.2");
  CHECK(
      value(
          R"(agreed_comparison_info{comparison="protein",measurand="protein",unit="g/100 g",x="line1",y="line2"})") ==
      "1");
  CHECK(value(R"(agreed_alerts{kind="agreement_lost",severity="critical",state="open"})") == "2");
  CHECK(value(R"(agreed_alerts{kind="agreement_lost",severity="critical",state="acknowledged"})") == "1");
  CHECK(value(R"(agreed_alerts{kind="storage_low",severity="critical",state="open"})") == "0");
  CHECK(value(R"(agreed_messages{route="engineer",state="waiting"})") == "3");
  CHECK(value(R"(agreed_messages{route="engineer",state="undeliverable"})") == "0");
  CHECK(value(R"(agreed_messages{route="shift \"A\"",state="waiting"})") == "0");
  CHECK(value(R"(agreed_messages{route="former",state="undeliverable"})") == "1");
  CHECK(value("agreed_chain_sequence") == "7");
  CHECK(value("agreed_alarm_budget_alerts_per_year") == "6");
  CHECK(value(R"(agreed_alarm_budget_expected_alerts_per_year{kind="agreement_drifting"})") == "1.5");
  CHECK(text.ends_with("\n# EOF\n"));
}

TEST_CASE("right after the start, or with a journal that cannot be asked, the rest is still told") {
  const std::string text = metrics_text(empty_snapshot(), std::nullopt);
  CHECK(value_of(text, "agreed_ready") == "0");
  CHECK(value_of(text, R"(agreed_overall{agreed_overall="starting"})") == "1");
  CHECK(
      value_of(text,
               R"(agreed_comparison_verdict{comparison="protein",agreed_comparison_verdict="gathering"})") ==
      "1");
  CHECK(text.find("agreed_messages") == std::string::npos);
}
