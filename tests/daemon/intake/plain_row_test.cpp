// The rules that concern one row, whatever syntax it came in.
#include <doctest/doctest.h>

#include "daemon/intake/result_text.hpp"
#include "tests/daemon/intake/read_plain.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

const std::string kHeader =
    "kind,measured_at,measurand,item,value,replicate,operator,note,analyzer,standard\n";

ReadFile read_row(const std::string& row, const HowToRead& how = {}) {
  return read_plain(kHeader + row + "\n", how);
}

/// The one bad row that `row` makes.
BadRow refused(const std::string& row, const HowToRead& how = {}) {
  return only_bad_row(read_row(row, how), row);
}

Row accepted(const std::string& row, const HowToRead& how = {}) {
  const ReadFile file = read_row(row, how);
  CAPTURE(row);
  for (const BadRow& bad : file.bad_rows) MESSAGE(bad.reason);
  REQUIRE(file.rows.size() == 1);
  return file.rows[0];
}

std::string with_value(const std::string& value) {
  return "check,2026-01-05T06:00:00Z,protein,wheat-low," + value + ",,,,,";
}
std::string at_time(const std::string& time) {
  return "check," + time + ",protein,wheat-low,10.6,,,,,";
}
bool says(const BadRow& bad, const char* words) {
  INFO(bad.reason);
  return bad.reason.find(words) != std::string::npos;
}

}  // namespace

TEST_CASE("each kind of row means what it says") {
  const Row check = accepted("check,2026-01-05T06:00:00Z,protein,wheat-low,10.61,2,Orla,morning,line1,");
  CHECK(check.kind == RowKind::check);
  CHECK(check.line == 2);
  CHECK(check.measured_at == at("2026-01-05T06:00:00Z"));
  CHECK(check.analyzer == AnalyzerIndex{0});
  CHECK(check.measurand == MeasurandIndex{1});
  CHECK(check.item == "wheat-low");
  CHECK(check.standard == StandardIndex{1});
  CHECK(check.replicate == 2);
  CHECK(check.value == doctest::Approx(10.61).epsilon(1e-15));
  CHECK(check.by == "Orla");
  CHECK(check.note == "morning");

  const Row split = accepted("split,2026-01-05T06:00:00Z,moisture,S-17,14.2,,,,,");
  CHECK(split.kind == RowKind::split);
  CHECK(split.measurand == MeasurandIndex{0});
  CHECK(split.item == "S-17");
  CHECK_FALSE(split.standard);

  const Row repair = accepted("intervention,2026-01-05T06:00:00Z,,repaired,,,Orla,new lamp,,");
  CHECK(repair.kind == RowKind::intervention);
  CHECK(repair.intervention == InterventionKind::repaired);
  CHECK_FALSE(repair.measurand);
  CHECK_FALSE(repair.standard);

  const Row level = accepted("intervention,2026-01-05T06:00:00Z,protein,level_accepted,,,,,,wheat-high");
  CHECK(level.intervention == InterventionKind::level_accepted);
  CHECK(level.standard == StandardIndex{0});
  CHECK(level.measurand == MeasurandIndex{1});

  const Row taken_back = accepted("void,2026-01-05T06:00:00Z,protein,S-17,,1,,wrong cup,,");
  CHECK(taken_back.kind == RowKind::void_);
  CHECK(taken_back.replicate == 1);
  CHECK(taken_back.note == "wrong cup");
}

TEST_CASE("a row with both sides of a pair makes one result on each analyzer") {
  const std::string header = "kind,measured_at,measurand,item,x,y,comparison\n";
  const ReadFile file = read_plain(header + "split,2026-01-05T06:00:00Z,protein,S-17,11.2,>20,protein\n" +
                                   "split,2026-01-05T07:00:00Z,,S-18,11.2,11.3,protein\n");
  REQUIRE(file.rows.size() == 4);
  CHECK(file.rows[0].analyzer == AnalyzerIndex{0});
  CHECK(file.rows[0].value == doctest::Approx(11.2));
  CHECK(file.rows[0].censored == Censoring::none);
  CHECK(file.rows[1].analyzer == AnalyzerIndex{1});
  CHECK(file.rows[1].value == 20.0);
  CHECK(file.rows[1].censored == Censoring::above);
  CHECK(file.rows[1].measured_at == file.rows[0].measured_at);
  CHECK(file.rows[3].measurand == MeasurandIndex{1});

  for (const char* row : {"split,2026-01-05T06:00:00Z,protein,S-17,11.2,,protein",
                          "split,2026-01-05T06:00:00Z,protein,S-17,11.2,11.3,",
                          "split,2026-01-05T06:00:00Z,protein,S-17,11.2,11.3,protien",
                          "split,2026-01-05T06:00:00Z,moisture,S-17,11.2,11.3,protein",
                          "check,2026-01-05T06:00:00Z,protein,wheat-low,11.2,11.3,protein"}) {
    CAPTURE(row);
    const ReadFile bad = read_plain(header + row + "\n");
    CHECK(bad.rows.empty());
    CHECK(bad.bad_rows.size() == 1);
  }
}

TEST_CASE("results are decimal numbers, censored or not") {
  CHECK(accepted(with_value("-1.5e-3")).value == -0.0015);
  CHECK(accepted(with_value("+1.5E2")).value == 150.0);
  CHECK(accepted(with_value(".5")).value == 0.5);
  CHECK_FALSE(std::signbit(accepted(with_value("-0")).value));
  const Row below = accepted(with_value("<0.05"));
  CHECK(below.censored == Censoring::below);
  CHECK(below.value == 0.05);
  CHECK(accepted(with_value("> 20")).censored == Censoring::above);
  for (const char* text : {"nan", "inf", "-inf", "0x1", "1e", "1.2.3", "--1", "+-1", "1e400", "<", "<<1",
                           "1 2", "12,5 ", ".", "-", "1e-400", "infinity", "1_000"})
    CHECK_FALSE(parse_result(text));
  CHECK(says(refused(with_value("\"1,5\"")), "the decimal sign is \".\""));
  CHECK(says(refused(with_value("")), "value: empty"));
  CHECK(refused(with_value("nan")).column == 5);
}

TEST_CASE("a replicate number is an integer from 0") {
  for (const char* text : {"-1", "1.0", "one", "99999999999", "+1"}) {
    CHECK(says(refused("split,2026-01-05T06:00:00Z,protein,S-1,11," + std::string(text) + ",,,,"),
               "replicate"));
  }
}

TEST_CASE("an unknown name is refused with the nearest right one") {
  CHECK(says(refused("chekc,2026-01-05T06:00:00Z,protein,wheat-low,1,,,,,"), "did you mean \"check\"?"));
  CHECK(says(refused("check,2026-01-05T06:00:00Z,protien,wheat-low,1,,,,,"), "did you mean \"protein\"?"));
  CHECK(says(refused("check,2026-01-05T06:00:00Z,protein,wheat-lo,1,,,,,"), "did you mean \"wheat-low\"?"));
  CHECK(
      says(refused("check,2026-01-05T06:00:00Z,protein,barley,1,,,,,"), "there are: wheat-high, wheat-low"));
  CHECK(says(refused("intervention,2026-01-05T06:00:00Z,,repared,,,,,,"), "did you mean \"repaired\"?"));
  CHECK(says(refused("intervention,2026-01-05T06:00:00Z,,noted,,,,,,wheat"), "no check standard"));
  CHECK(says(refused("check,2026-01-05T06:00:00Z,protein,wheat-low,1,,,,line2,"),
             "in the folder of \"line1\""));
}

TEST_CASE("an intervention has no value and a reading has an item and a measurand") {
  CHECK(says(refused("intervention,2026-01-05T06:00:00Z,,noted,1.5,,,,,"), "no value"));
  CHECK(says(refused("split,2026-01-05T06:00:00Z,protein,,1.5,,,,,"), "item: empty"));
  CHECK(says(refused("split,2026-01-05T06:00:00Z,,S-1,1.5,,,,,"), "measurand: empty"));
}

TEST_CASE("texts are UTF-8 without control characters, at most 200 bytes") {
  const std::string before = "split,2026-01-05T06:00:00Z,protein,", after = ",11,,,,,";
  CHECK(accepted(before + "M\xC3\xBChle <b>" + after).item == "M\xC3\xBChle <b>");
  CHECK(accepted(before + std::string(200, 'a') + after).item.size() == 200);
  for (const std::string& item :
       {std::string(201, 'a'), std::string("a\x01"), std::string("a\xFF"), std::string("\xC0\xAF"),
        std::string("\xED\xA0\x80"), std::string("a\xC2\x85"), std::string("a\0b", 3), std::string("a\x7F")})
    CHECK(says(refused(before + item + after), "item"));
  CHECK(says(refused("split,2026-01-05T06:00:00Z,protein,S-1,11,,,a\tb,,"), "note"));
  CHECK(says(refused("split,2026-01-05T06:00:00Z,protein,S-1,11,,\xE9,,,"), "operator: \"\\xE9\""));
}

TEST_CASE("columns the format does not know are kept in the note") {
  const ReadFile file = read_plain(
      "Batch No,kind,measured_at,measurand,item,value,note,cup\n"
      "B7,split,2026-01-05T06:00:00Z,protein,S-1,11,\"fine, dry\",2\n"
      ",split,2026-01-05T06:00:00Z,protein,S-2,11,,\n"
      "b\x01,split,2026-01-05T06:00:00Z,protein,S-3,11,,\n");
  REQUIRE(file.rows.size() == 2);
  CHECK(file.rows[0].note == "fine, dry; Batch No=B7; cup=2");
  CHECK(file.rows[1].note == "");
  REQUIRE(file.bad_rows.size() == 1);
  CHECK(file.bad_rows[0].column == 1);
}

TEST_CASE("a time without offset is read in the analyzer's zone") {
  CHECK(accepted(at_time("2025-07-05T06:00:00")).measured_at == at("2025-07-05T05:00:00Z"));
  CHECK(accepted(at_time("2026-01-05 06:00:00.1239")).measured_at == at("2026-01-05T06:00:00.123Z"));
  CHECK(accepted(at_time("2026-01-05T06:00:00+02:00")).measured_at == at("2026-01-05T04:00:00Z"));
  CHECK(accepted(at_time("2025-07-05T06:00:00"), {.zone = "UTC"}).measured_at == at("2025-07-05T06:00:00Z"));
  CHECK(accepted(at_time("2025-07-05T06:00:00"), {.zone = "America/New_York"}).measured_at ==
        at("2025-07-05T10:00:00Z"));
}

// The clock in Ireland went back on 2025-10-26 at 02:00 (01:00 UTC) and forward on 2025-03-30 at 01:00.
TEST_CASE("a local time that happened twice takes the earlier reading and is flagged") {
  const Row twice = accepted(at_time("2025-10-26T01:30:00"));
  CHECK(twice.measured_at == at("2025-10-26T00:30:00Z"));
  CHECK(twice.clock_ambiguous);
  CHECK_FALSE(accepted(at_time("2025-10-26T02:00:00")).clock_ambiguous);
  CHECK_FALSE(accepted(at_time("2025-10-26T01:30:00Z")).clock_ambiguous);
}

TEST_CASE("a local time that never happened is refused") {
  CHECK(says(refused(at_time("2025-03-30T01:30:00")), "does not exist in Europe/Dublin"));
  CHECK(accepted(at_time("2025-03-30T02:00:00")).measured_at == at("2025-03-30T01:00:00Z"));
}

TEST_CASE("times the clock cannot vouch for are refused") {
  CHECK(accepted(at_time("2026-03-01T00:05:00Z")).measured_at == at("2026-03-01T00:05:00Z"));
  CHECK(says(refused(at_time("2026-03-01T00:05:00.001Z")), "more than 5 min in the future"));
  CHECK(says(refused(at_time("1999-12-31T23:59:59Z")), "before not_before"));
  CHECK(says(refused(at_time("2038-01-01T00:00:00")), "after 2037"));
  CHECK(says(refused(at_time("05.01.2026 06:00")), "is no time"));
  CHECK(says(refused(at_time("")), "is no time"));
}
