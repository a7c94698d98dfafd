// Exports as JSON lines and as one array.
#include <doctest/doctest.h>

#include "tests/daemon/intake/read_mapped.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

const std::string kKeys = R"(
    time: {column: ts, pattern: unix_milliseconds}
    item: {column: sample.id}
    kind: {check_when_item_matches: "^wheat-"}
    decimal: ","
    values: {protein: results.prot, moisture: {column: results.h2o, factor: 0.1}}
    columns: {operator: user}
)";

}  // namespace

TEST_CASE("keys of inner objects are columns; numbers have a point whatever the decimal sign of texts") {
  const std::string object =
      R"({"ts":1767592800000,"sample":{"id":"wheat-low","cups":[1,{"a":[2]}]},"results":{"prot":10.61,"h2o":"141,7"},"user":null})";
  for (const bool array : {false, true}) {
    const ReadFile file = read_mapped((array ? "    type: json" : "    type: jsonl") + kKeys,
                                      array ? "[" + object + ",\n" + object + "]" : object + "\n\n" + object);
    CHECK(file.unusable == "");
    for (const BadRow& bad : file.bad_rows) MESSAGE(bad.reason);
    REQUIRE(file.rows.size() == 4);
    CHECK(file.rows[0].value == 14.17);
    CHECK(file.rows[1].value == 10.61);
    CHECK(file.rows[1].kind == RowKind::check);
    CHECK(file.rows[1].measured_at == at("2026-01-05T06:00:00Z"));
    CHECK(file.rows[3].line == (array ? 2 : 3));
  }
}

TEST_CASE("bad objects are told with their keys") {
  const auto reason = [](const char* object) {
    const ReadFile file = read_mapped("    type: jsonl" + kKeys, object);
    CAPTURE(object);
    CHECK(file.rows.empty());
    REQUIRE(file.bad_rows.size() == 1);
    return file.bad_rows[0].reason;
  };
  CHECK(reason(R"({"sample":{"id":"S-1"},"results":{"prot":1}})") ==
        "ts: \"\" is no time as expected; one like 1767188759000 was expected");
  CHECK(reason(R"({"ts":1767592800000,"sample":{"id":"S-1"},"results":{"prot":"1.5"}})") ==
        "results.prot: \"1.5\" is no result; a decimal number like 12,34, <0,05 or >20 was expected");
  CHECK(reason(R"({"ts":1,"sample":{"id":"a"},"sample":{"id":"b"}})").find("there twice") !=
        std::string::npos);
  CHECK(reason(R"([1])") == "an array; an object was expected");
  CHECK(reason((std::string(R"({"a":)") + std::string(40, '[')).c_str()) == "nested more than 32 deep");
}
