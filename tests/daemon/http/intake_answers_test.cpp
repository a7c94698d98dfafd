// What came in, as it is asked for and told: parameters, cursors, JSON and CSV.
#include <doctest/doctest.h>
#include <nlohmann/json.hpp>

#include "daemon/http/intake_parameters.hpp"
#include "daemon/http/media_type.hpp"
#include "daemon/render/files_json.hpp"
#include "daemon/render/readings_text.hpp"
#include "tests/daemon/http/mill_snapshot.hpp"

using namespace agreed;
using namespace agreed::test;
using nlohmann::json;

namespace {

ReadingRow odd_reading() {
  ReadingRow row;
  row.analyzer = "line1";
  row.measurand = "protein";
  row.item = "=S-1,\"a\"";
  row.kind = StoredKind::split;
  row.measured_at = at_hour(6);
  row.received_at = at_hour(7);
  row.replicate = 2;
  row.revision = 1;
  row.value = -0.05;
  row.censored = -1;
  row.voided = true;
  row.file = 4;
  row.line = 9;
  row.by = "@J. Miller";
  row.note = "cup 2";
  return row;
}

}  // namespace

TEST_CASE("a cursor leads back to the key it was made of, whatever the item") {
  const ReadingRow row = odd_reading();
  const auto target = take_apart("/api/readings?limit=5000&after=" + reading_cursor(row));
  REQUIRE(target.has_value());
  const auto query = reading_query(*target);
  CHECK(query.error.empty());
  CHECK(query.value.limit == 5000);
  REQUIRE(query.value.after.has_value());
  const ReadingRow& back = *query.value.after;
  CHECK(back.analyzer == row.analyzer);
  CHECK(back.kind == row.kind);
  CHECK(back.measurand == row.measurand);
  CHECK(back.item == row.item);
  CHECK(back.measured_at == row.measured_at);
  CHECK(back.replicate == row.replicate);
  CHECK(back.revision == row.revision);
}

TEST_CASE("parameters become a query; wrong ones are told") {
  const auto good = reading_query(*take_apart(
      "/api/readings?analyzer=line1&measurand=protein&standard=wheat-low&from=2026-01-05T06:00:00Z"));
  CHECK(good.error.empty());
  CHECK(good.value.kind == StoredKind::check);
  CHECK(good.value.item == "wheat-low");
  CHECK(good.value.from == at_hour(6));
  CHECK(good.value.limit == 100);
  CHECK(reading_query(*take_apart("/api/readings?analyser=line1")).error ==
        "There is no parameter analyser; did you mean \"analyzer\"?");
  for (const char* wrong :
       {"kind=void", "kind=split&standard=wheat-low", "kind=check&sample=S-1", "standard=a&sample=b",
        "sample=", "from=yesterday", "to=2026-01-05T06:00:00", "limit=0", "limit=5001", "after=", "after=xyz",
        "after=6162", "limit=1&limit=2"}) {
    CAPTURE(wrong);
    CHECK_FALSE(reading_query(*take_apart(std::string("/api/readings?") + wrong)).error.empty());
  }
  const auto files = file_query(*take_apart("/api/files?outcome=grown&analyzer=line1&limit=7&after=12"));
  CHECK(files.error.empty());
  CHECK(files.value.outcome == "grown");
  CHECK(files.value.analyzer == "line1");
  CHECK(files.value.limit == 7);
  CHECK(files.value.before_id == 12);
  for (const char* wrong : {"outcome=", "outcome=good", "limit=501", "after=0", "after=x", "kind=check"}) {
    CAPTURE(wrong);
    CHECK_FALSE(file_query(*take_apart(std::string("/api/files?") + wrong)).error.empty());
  }
}

TEST_CASE("a name that is not configured is told with the nearest one") {
  const auto settings = mill_settings();
  CHECK(unknown_name(*take_apart("/api/files?analyzer=line1"), *settings).empty());
  CHECK(unknown_name(*take_apart("/api/readings?standard=wheat-lo"), *settings) ==
        "There is no standard wheat-lo; did you mean \"wheat-low\"?");
}

TEST_CASE("the next page keeps the filters and quotes what would end a link") {
  CHECK(next_page(*take_apart("/api/readings?sample=a%3E%22b&after=00"), "ff") ==
        "/api/readings?sample=a%3e%22b&after=ff");
}

TEST_CASE("CSV is for who prefers it") {
  for (const char* accept :
       {"text/csv", "Text/CSV;q=0.5", "text/html, text/csv;q=0.9, application/json;q=0.8",
        "text/csv, application/json", "text/csv;header=present, */*"}) {
    CAPTURE(accept);
    CHECK(prefers_csv(accept));
  }
  for (const char* accept :
       {"", "*/*", "text/*", "application/json", "text/csv;q=0", "application/json, text/csv",
        "text/csv;q=0.8, application/json;q=0.9", "text/csvx", ",;,"}) {
    CAPTURE(accept);
    CHECK_FALSE(prefers_csv(accept));
  }
}

TEST_CASE("cells a spreadsheet would compute are made harmless, plain numbers stay") {
  for (const char* kept : {"-0.05", "+3", "-1.5e-7", "-.5", "S-1", "", "<0.05", "1=2"}) {
    CAPTURE(kept);
    CHECK(csv_cell(kept) == kept);
  }
  for (const char* computed : {"=1", "+a", "-", "-1-2", "@x", "-1e", "-.", "+1.2.3"}) {
    CAPTURE(computed);
    CHECK(csv_cell(computed) == "'" + std::string(computed));
  }
  CHECK(csv_cell("a,\"b\"") == R"("a,""b""")");
  CHECK(csv_cell("=a,b") == R"("'=a,b")");
}

TEST_CASE("readings as CSV and as JSON say the same") {
  CHECK(readings_csv({odd_reading()}) ==
        "kind,measured_at,measurand,item,value,replicate,operator,note,analyzer,censored,voided,corrected,"
        "revision,clock_ambiguous,file,line,received_at\r\n"
        "split,2026-01-05T06:00:00.000Z,protein,\"'=S-1,\"\"a\"\"\",<-0.05,2,'@J. Miller,cup "
        "2,line1,below,true,"
        "false,1,false,4,9,2026-01-05T07:00:00.000Z\r\n");
  const json answer = json::parse(readings_json({odd_reading()}, "6162"));
  CHECK(answer.at("next") == "6162");
  const json& reading = answer.at("readings").at(0);
  CHECK(reading.at("item") == "=S-1,\"a\"");
  CHECK(reading.at("value") == -0.05);
  CHECK(reading.at("censored") == "below");
  CHECK(reading.at("voided") == true);
  CHECK(reading.at("operator") == "@J. Miller");
}

TEST_CASE("a file is told with its counts, its rejected rows and clean names") {
  FileRow file;
  file.id = 3;
  file.analyzer = "line1";
  file.name = "odd\xff.csv";
  file.outcome = "done";
  file.size = 120;
  file.accepted = 2;
  file.rejected = 1;
  file.rejected_rows = {{3, 4, 0, "a\n", "no number"}};
  const json answer = json::parse(files_json({file}, std::nullopt));
  CHECK(answer.at("next").is_null());
  const json& told = answer.at("files").at(0);
  CHECK(told.at("name") == "odd\\xFF.csv");
  CHECK(told.at("rows").at("rejected") == 1);
  CHECK(told.at("rejected_rows").at(0).at("text") == "a\\x0A");
  CHECK(told.at("rejected_rows").at(0).at("column").is_null());
  CHECK(told.at("committed_at").is_null());
}
