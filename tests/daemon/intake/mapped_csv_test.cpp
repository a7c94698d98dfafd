// Exports as CSV: what is read of them, and what is said about what is not.
#include <doctest/doctest.h>

#include "tests/daemon/intake/read_mapped.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

const std::string kWide = R"(
    delimiter: ";"
    decimal: ","
    time: {column: Datum, pattern: "%d.%m.%Y %H:%M:%S"}
    item: {column: Probe}
    kind: {check_when_item_matches: "^CS-"}
    items: {CS-LOW: wheat-low, CS-HIGH: wheat-high}
    values: {protein: Prot %, moisture: {column: H2O g/kg, factor: 0.1}}
)";
const std::string kWideHeader = "Datum;Probe;Prot %;H2O g/kg\n";

const std::string kLong = R"(
    time: {columns: [date, time], pattern: "%m/%d/%Y %I:%M %p"}
    item: {column: sample}
    kind: {column: purpose, words: {QC: check, run: split, "undo": void, "service": intervention}}
    measurand: {column: parameter, names: {PROT: protein, H2O: moisture}}
    value: {column: result}
    values: {moisture: {factor: 0.1}}
    columns: {replicate: rep, operator: by, note: remark, standard: of}
    notes: [batch]
    no_value: [n/a]
)";
const std::string kLongHeader = "date,time,sample,purpose,parameter,result,rep,by,remark,of,batch,ignored\n";

/// The one bad row that a row makes.
BadRow refused(const std::string& format, const std::string& header, const std::string& row) {
  return only_bad_row(read_mapped(format, header + row + "\n"), row);
}

void check_refused(const std::string& row, std::uint32_t column, const char* reason) {
  const BadRow bad = refused(kWide, kWideHeader, row);
  CHECK(bad.column == column);
  CHECK(bad.reason == reason);
}

}  // namespace

TEST_CASE("a wide export gives a result for each measurand of a row") {
  const ReadFile file = read_mapped(kWide, kWideHeader +
                                               "05.01.2026 06:00:00;CS-LOW;10,61;141,7\n"
                                               "05.07.2025 06:00:00;S-17;<0,05;\n");
  CHECK(file.unusable == "");
  CHECK(file.bad_rows.empty());
  REQUIRE(file.rows.size() == 3);
  CHECK(file.rows[0].kind == RowKind::check);
  CHECK(file.rows[0].item == "wheat-low");
  CHECK(file.rows[0].standard);
  CHECK(file.rows[0].measured_at == at("2026-01-05T06:00:00Z"));
  CHECK(file.rows[0].measurand == MeasurandIndex{0});  // moisture comes first by its id
  CHECK(file.rows[0].value == 14.17);
  CHECK(file.rows[1].measurand == MeasurandIndex{1});
  CHECK(file.rows[1].value == 10.61);
  CHECK(file.rows[1].line == 2);
  CHECK(file.rows[2].kind == RowKind::split);
  CHECK(file.rows[2].item == "S-17");
  CHECK(file.rows[2].measured_at == at("2025-07-05T05:00:00Z"));  // summer time in Dublin
  CHECK(file.rows[2].censored == Censoring::below);
  CHECK(file.rows[2].value == 0.05);
}

TEST_CASE("a bad row of an export is told with the export's own names") {
  check_refused("5.1.26;CS-LOW;10,6;140", 1,
                "Datum: \"5.1.26\" is no time as expected; one like 31.12.2025 13:45:59 was expected");
  check_refused("05.01.2026 06:00:00;CS-LWO;10,6;140", 2,
                "Probe: \"CS-LWO\" is not known; did you mean \"CS-LOW\"?");
  check_refused("05.01.2026 06:00:00;;10,6;140", 2, "Probe: empty; what was measured or done was expected");
  check_refused("05.01.2026 06:00:00;S-1;;", 4,
                "H2O g/kg: empty, like the other results of this row; at least one was expected");
  check_refused("05.01.2026 06:00:00;S-1;10.6;", 3,
                "Prot %: \"10.6\" is no result; a decimal number like 12,34, <0,05 or >20 was expected");
  check_refused("02.03.2026 06:00:00;S-1;10,6;140", 1,
                "Datum: \"02.03.2026 06:00:00\" is more than 5 min in the future (it is "
                "2026-03-01T00:00:00.000Z now)");
  check_refused("05.01.1999 06:00:00;S-1;10,6;140", 1,
                "Datum: \"05.01.1999 06:00:00\" is before not_before (2000-01-01T00:00:00.000Z)");
  check_refused("05.01.2026 06:00:00;S-1;10,6", 0, "the row has 3 fields; the header has 4");
}

TEST_CASE("one wrong result of a wide row costs no other result") {
  const ReadFile file = read_mapped(kWide, kWideHeader + "05.01.2026 06:00:00;S-1;10,6;x\n");
  REQUIRE(file.rows.size() == 1);
  CHECK(file.rows[0].value == 10.6);
  REQUIRE(file.bad_rows.size() == 1);
  CHECK(file.bad_rows[0].column == 4);
}

TEST_CASE(
    "ambiguous clock: a mapped local time that happened twice takes the earlier reading and is flagged") {
  const ReadFile file = read_mapped(kWide, kWideHeader +
                                               "26.10.2025 01:30:00;S-1;10,6;\n"
                                               "30.03.2025 01:30:00;S-2;10,6;\n");
  REQUIRE(file.rows.size() == 1);
  CHECK(file.rows[0].measured_at == at("2025-10-26T00:30:00Z"));
  CHECK(file.rows[0].clock_ambiguous);
  REQUIRE(file.bad_rows.size() == 1);
  CHECK(file.bad_rows[0].reason ==
        "Datum: \"30.03.2025 01:30:00\" does not exist in Europe/Dublin: the clock was put forward over it");
}

TEST_CASE("a format's own zone stands before the analyzer's, and an offset before both") {
  const std::string rest = "\n    item: {column: s}\n    values: {protein: p}\n";
  const auto measured = [&](const std::string& time, const std::string& text) {
    const ReadFile file = read_mapped("    time: " + time + rest, "t,s,p\n" + text + ",S-1,10\n");
    REQUIRE(file.rows.size() == 1);
    return file.rows[0].measured_at;
  };
  CHECK(measured("{column: t, zone: America/New_York}", "2025-07-05T06:00:00") == at("2025-07-05T10:00:00Z"));
  CHECK(measured("{column: t}", "2025-07-05T06:00:00") == at("2025-07-05T05:00:00Z"));
  CHECK(measured("{column: t, zone: America/New_York}", "2025-07-05T06:00:00+02:00") ==
        at("2025-07-05T04:00:00Z"));
  CHECK(measured("{column: t, pattern: '%F %T %z'}", "2025-07-05 06:00:00 -0300") ==
        at("2025-07-05T09:00:00Z"));
  CHECK(measured("{column: t, pattern: unix_seconds}", "1767592800.25") == at("2026-01-05T06:00:00.25Z"));
}

TEST_CASE("a long export names its measurand; interventions and voids come by the words of its kind") {
  const ReadFile file =
      read_mapped(kLong, kLongHeader +
                             "01/05/2026,6:00 AM,wheat-low,QC,PROT,10.61,2,Orla,warm,,B7,x\n"
                             "01/05/2026,6:10 PM,S-1,run,H2O,141,,,,,,\n"
                             "01/05/2026,12:00 PM,recalibrated,service,PROT,,,Orla,new curve,wheat-low,,\n"
                             "01/05/2026,6:10 PM,S-1,undo,H2O,n/a,,,,,,\n");
  for (const BadRow& bad : file.bad_rows) MESSAGE(bad.reason);
  REQUIRE(file.rows.size() == 4);
  CHECK(file.rows[0].replicate == 2);
  CHECK(file.rows[0].by == "Orla");
  CHECK(file.rows[0].note == "warm; batch=B7");
  CHECK(file.rows[0].value == 10.61);
  CHECK(file.rows[1].measured_at == at("2026-01-05T18:10:00Z"));
  CHECK(file.rows[1].value == 14.1);
  CHECK(file.rows[2].kind == RowKind::intervention);
  CHECK(file.rows[2].intervention == InterventionKind::recalibrated);
  CHECK(file.rows[2].measured_at == at("2026-01-05T12:00:00Z"));
  CHECK(file.rows[2].measurand == MeasurandIndex{1});
  CHECK(file.rows[2].standard);
  CHECK(file.rows[3].kind == RowKind::void_);
  CHECK(file.rows[3].measured_at == file.rows[1].measured_at);

  CHECK(refused(kLong, kLongHeader, "01/05/2026,6:00 AM,S-1,rnu,PROT,10,,,,,,").reason ==
        "purpose: \"rnu\" is not known; did you mean \"run\"?");
  CHECK(refused(kLong, kLongHeader, "01/05/2026,6:00 AM,S-1,run,PRTO,10,,,,,,").reason ==
        "parameter: \"PRTO\" is not known; did you mean \"PROT\"?");
  CHECK(refused(kLong, kLongHeader, "01/05/2026,6:00 AM,S-1,run,PROT,n/a,,,,,,").reason ==
        "result: empty; a result like 12.34, <0.05 or >20 was expected");
  CHECK(
      refused(kLong, kLongHeader, "01/05/2026,13:00 AM,S-1,run,PROT,10,,,,,,").reason ==
      "date time: \"01/05/2026 13:00 AM\" is no time as expected; one like 12/31/2025 01:45 PM was expected");
  CHECK(refused(kLong, kLongHeader, "01/05/2026,6:00 AM,S-1,run,PROT,10,-1,,,,,").reason ==
        "rep: \"-1\" is no replicate number; an integer from 0 was expected");
}

TEST_CASE("finished pairs make one result on each analyzer") {
  const ReadFile file = read_mapped(
      "    time: {column: at}\n    item: {column: sample}\n    x: {column: a}\n"
      "    y: {column: b, factor: 10}\n    constants: {comparison: protein, operator: lab}\n",
      "at,sample,a,b\n2026-01-05T06:00:00Z,S-1,11.2,1.13\n2026-01-05T06:00:00Z,S-2,11.2,\n");
  REQUIRE(file.rows.size() == 2);
  CHECK(file.rows[0].analyzer == AnalyzerIndex{0});
  CHECK(file.rows[0].value == 11.2);
  CHECK(file.rows[1].analyzer == AnalyzerIndex{1});
  CHECK(file.rows[1].value == 11.3);
  CHECK(file.rows[1].by == "lab");
  REQUIRE(file.bad_rows.size() == 1);
  CHECK(file.bad_rows[0].reason == "b: empty; a result like 12.34, <0.05 or >20 was expected");
}

TEST_CASE("lines before the header, files without one, delimiters at line ends, means and a header again") {
  const std::string rest =
      "    time: {column: t}\n    item: {column: s}\n    values: {protein: p}\n"
      "    skip_rows: {column: s, matches: '^Mean'}\n    skip_lines: 2\n    delimiter: tab\n";
  const ReadFile file = read_mapped(rest,
                                    "Report \"of the day\n\tx\n\nt\ts\tp\t\n"
                                    "2026-01-05T06:00:00Z\tS-1\t10\t\n\tMean\t10\t\nt\ts\tp\t\n"
                                    "2026-01-05T07:00:00Z\tS-2\t11\n2026-01-05T08:00:00Z\tS-3\t12\t\t\t\n");
  CHECK(file.unusable == "");
  REQUIRE(file.rows.size() == 2);
  CHECK(file.rows[0].line == 5);
  CHECK(file.rows[1].item == "S-3");
  REQUIRE(file.bad_rows.size() == 1);
  CHECK(file.bad_rows[0].line == 8);

  const std::string headless =
      "    header: false\n    time: {column: 2}\n    item: {column: 1}\n    values: {protein: 4}\n";
  const ReadFile other = read_mapped(headless, "S-1,2026-01-05T06:00:00Z,x,10\nS-2,2026-01-05T06:00:00Z,x\n");
  REQUIRE(other.rows.size() == 1);
  CHECK(other.rows[0].line == 1);
  REQUIRE(other.bad_rows.size() == 1);
  CHECK(other.bad_rows[0].reason == "the row has 3 fields; at least 4 were expected");
}

TEST_CASE("a header that lacks a column makes the file unusable, with the nearest name") {
  CHECK(read_mapped(kWide, "Datum;Probe;Prot%;H2O g/kg\n").unusable ==
        "the header has no column \"Prot %\", which the format own needs; did you mean \"Prot%\"?");
  CHECK(read_mapped(kWide, "Datum;Probe;Prot %;Prot %;H2O g/kg\n").unusable ==
        "the header has the column \"Prot %\" twice; once was expected");
  CHECK(read_mapped(kWide, "").unusable == "the file is empty; a header row was expected");
  CHECK(read_mapped(kWide, std::string("\0\1\2;", 4) + "\n").unusable != "");
}

TEST_CASE("every cut of an export gives the same rows") {
  std::string text = kWideHeader;
  for (int i = 10; i < 30; ++i)
    text += "05.01.2026 06:00:" + std::to_string(i) + ";\"S;" + std::to_string(i) + "\";10,6;14\n";
  for (const std::size_t block : {1U, 2U, 3U, 7U, 64U}) {
    const ReadFile file = read_mapped(kWide, text, block);
    CHECK(file.rows.size() == 40);
    CHECK(file.bad_rows.empty());
    CHECK(file.rows.back().item == "S;29");
  }
}
