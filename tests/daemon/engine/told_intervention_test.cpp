// Interventions that came by no file: judged, stored and folded like those of a file.
#include "daemon/intake/told_intervention.hpp"

#include <doctest/doctest.h>

#include "mill_engine.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

ToldIntervention lamp_changed() {
  return {"line1", "", "protein", "consumable_changed", "2026-01-06T00:00:00Z", "K. Byrne", "lamp"};
}

std::vector<Row> day_of_checks() {
  std::vector<Row> rows;
  for (int i = 0; i < 40; ++i) rows.push_back(check(i, 10.6 + 0.01 * (i % 3) + (i > 24 ? 0.2 : 0)));
  return rows;
}

FieldFault fault_of(const InterventionReader& reader, const ToldIntervention& told) {
  const auto read = reader.read(told, hour(48));
  REQUIRE(std::holds_alternative<FieldFault>(read));
  return std::get<FieldFault>(read);
}

}  // namespace

TEST_CASE("an intervention that was told has the effect of the same row of a file, also in the past") {
  Mill by_file, by_wish;
  by_file.start();
  by_wish.start();
  Row row = intervention(24, InterventionKind::consumable_changed);
  row.measurand = MeasurandIndex{0};
  by_file.give(file("a.csv", day_of_checks()));
  by_wish.give(file("a.csv", day_of_checks()));
  REQUIRE(*by_file.now()->charts.at(1) == *by_wish.now()->charts.at(1));
  const ChartView before = *by_file.now()->charts.at(1);
  by_file.give(file("b.csv", {row}));
  const AskAnswer answer = by_wish.engine->intervene(lamp_changed()).get();
  REQUIRE(answer.outcome == AskOutcome::done);
  CHECK(answer.intervention->id == 1);
  CHECK(answer.intervention->at == hour(24));
  // Nothing is waited for: answered is folded.
  CHECK(*by_file.now()->charts.at(1) == *by_wish.now()->charts.at(1));
  CHECK_FALSE(*by_wish.now()->charts.at(1) == before);
}

TEST_CASE("told again it is known, told otherwise the first stands; a new start changes nothing") {
  Mill mill;
  mill.start();
  const AskAnswer first = mill.engine->intervene(lamp_changed()).get();
  REQUIRE(first.outcome == AskOutcome::done);
  mill.start();
  const AskAnswer again = mill.engine->intervene(lamp_changed()).get();
  CHECK(again.outcome == AskOutcome::done_before);
  CHECK(again.intervention->id == first.intervention->id);
  ToldIntervention otherwise = lamp_changed();
  otherwise.note = "another";
  CHECK(mill.engine->intervene(otherwise).get().outcome == AskOutcome::not_possible);
  otherwise.kind = "repaired";
  CHECK(mill.engine->intervene(otherwise).get().outcome == AskOutcome::done);
}

TEST_CASE("what could not be committed was not stored") {
  Mill mill;
  mill.start();
  const auto sequence = mill.now()->chain.sequence;
  mill.break_journal();
  const AskAnswer failed = mill.engine->intervene(lamp_changed()).get();
  CHECK(failed.outcome == AskOutcome::unavailable);
  CHECK(failed.words.find("broken by the test") != std::string::npos);
  CHECK(mill.now()->chain.sequence == sequence);
  mill.repair_journal();
  const AskAnswer done = mill.engine->intervene(lamp_changed()).get();
  CHECK(done.outcome == AskOutcome::done);
}

TEST_CASE("every field is judged as in a file and named as in the request") {
  const Mill mill;
  const InterventionReader reader(mill.config.settings, mill.config.intake);
  const auto read = [&](const ToldIntervention& told) { return reader.read(told, hour(48)); };
  const auto row = std::get<Row>(read(lamp_changed()));
  CHECK(row.kind == RowKind::intervention);
  CHECK(row.intervention == InterventionKind::consumable_changed);
  CHECK(row.measured_at == hour(24));
  CHECK(row.by == "K. Byrne");
  CHECK(row.note == "lamp");
  CHECK_FALSE(row.standard.has_value());
  ToldIntervention undated = lamp_changed();
  undated.at.clear();
  CHECK(std::get<Row>(read(undated)).measured_at == hour(48));
  for (const auto& [field, text, words] :
       std::vector<std::tuple<std::string ToldIntervention::*, std::string, std::string>>{
           {&ToldIntervention::analyzer, "line3", "line1"},
           {&ToldIntervention::standard, "wheat-lowe", "did you mean \"wheat-low\"?"},
           {&ToldIntervention::measurand, "protien", "did you mean \"protein\"?"},
           {&ToldIntervention::kind, "", "what was measured or done"},
           {&ToldIntervention::kind, "recalibrate", "did you mean \"recalibrated\"?"},
           {&ToldIntervention::at, "noon", "2026-01-05T06:00:00Z"},
           {&ToldIntervention::at, "2026-01-07T00:05:00.001Z", "5 min in the future"},
           {&ToldIntervention::at, "1999-12-31T23:59:59Z", "not_before"},
           {&ToldIntervention::by, std::string(201, 'a'), "at most 200"},
           {&ToldIntervention::note, "a\tb", "control characters"}}) {
    CAPTURE(text);
    ToldIntervention told = lamp_changed();
    told.*field = text;
    const FieldFault fault = fault_of(reader, told);
    CHECK(told.*field == text);
    CHECK(fault.reason.find(words) != std::string::npos);
    CHECK(fault.reason.find("measured_at") == std::string::npos);
  }
  ToldIntervention edge = lamp_changed();
  edge.at = "2026-01-07T00:05:00Z";
  CHECK(std::get<Row>(read(edge)).measured_at == hour(48) + std::chrono::minutes(5));
  edge.at = "tomorrow";
  CHECK(fault_of(reader, edge).field == "at");
  edge = lamp_changed();
  edge.kind = "mended";
  CHECK(fault_of(reader, edge).field == "kind");
  edge = lamp_changed();
  edge.by = "\x01";
  CHECK(fault_of(reader, edge).field == "by");
}
