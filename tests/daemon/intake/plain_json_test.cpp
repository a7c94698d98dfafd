// The JSON syntaxes of the plain format.
#include <doctest/doctest.h>

#include "tests/daemon/intake/read_plain.hpp"

using namespace agreed;
using namespace agreed::testing;

namespace {

constexpr HowToRead kLines{.syntax = PlainSyntax::json_lines};
constexpr HowToRead kArray{.syntax = PlainSyntax::json_array};

std::string object(const std::string& item, const std::string& more = "") {
  return R"({"kind":"split","measured_at":"2026-01-05T06:00:00Z","measurand":"protein","item":")" + item +
         R"(","value":11.5)" + more + "}";
}
bool has(const std::string& text, const char* words) {
  INFO(text);
  return text.find(words) != std::string::npos;
}

}  // namespace

TEST_CASE("JSON lines and a JSON array are read like CSV") {
  const std::string a = object("S-1", R"(,"replicate":1,"note":null,"cup":"two","dry":true)"),
                    b = object("S-2", R"(,"value2":"x")");
  for (const ReadFile& file : {read_plain("\xEF\xBB\xBF" + a + "\r\n\n" + b + "\n", kLines),
                               read_plain("\xEF\xBB\xBF\n[" + a + ",\n" + b + "\n]\n", kArray)}) {
    CHECK(file.unusable == "");
    CHECK(file.bad_rows.empty());
    REQUIRE(file.rows.size() == 2);
    CHECK(file.rows[0].item == "S-1");
    CHECK(file.rows[0].value == 11.5);
    CHECK(file.rows[0].replicate == 1);
    CHECK(file.rows[0].note == "cup=two; dry=true");
    CHECK(file.rows[1].line == 3);
  }
}

TEST_CASE("JSON numbers are taken as they are written") {
  const auto value = [](const std::string& written) {
    const ReadFile file = read_plain(
        R"({"kind":"split","measured_at":"2026-01-05T06:00:00Z","measurand":"protein","item":"S","value":)" +
            written + "}\n",
        kLines);
    CAPTURE(written);
    return file.rows.size() == 1 ? file.rows[0].value : -1;
  };
  CHECK(value("0.1") == 0.1);
  CHECK(value("-3") == -3.0);
  CHECK(value("1e2") == 100.0);
  CHECK(value("\"<0.05\"") == 0.05);
  CHECK(value("18446744073709551616") == 18446744073709551616.0);
  for (const char* wrong : {"1e400", "NaN", "01", "true", "null", "[1]", "{}", "\"1,5\""})
    CHECK(value(wrong) == -1);
}

TEST_CASE("a wrong object is one bad row and says what is wrong") {
  const std::string nested = object("S", R"(,"note":{"a":1})"), twice = object("S", R"(,"item":"T")");
  const ReadFile file =
      read_plain(object("S-1") + "\n" + nested + "\n" + twice + "\n{\"kind\":\n[1]\n17\nx\n" +
                     std::string(100'000, '[') + "\n" + object("S-2") + "\n",
                 kLines);
  CHECK(file.rows.size() == 2);
  REQUIRE(file.bad_rows.size() == 7);
  CHECK(has(file.bad_rows[0].reason, "\"note\" holds an object"));
  CHECK(file.bad_rows[0].column == 6);
  CHECK(has(file.bad_rows[1].reason, "\"item\" is there twice"));
  CHECK(has(file.bad_rows[2].reason, "no valid JSON object"));
  CHECK(has(file.bad_rows[3].reason, "an array"));
  CHECK(has(file.bad_rows[4].reason, "no object"));
  CHECK(file.bad_rows[6].line == 8);
}

TEST_CASE("a broken element of an array costs no other") {
  const ReadFile file =
      read_plain("[" + object("S-1") + ",\n{\"kind\": \"]},\\\"\"},\n,17," + object("S-2") + "] x", kArray);
  CHECK(file.rows.size() == 2);
  REQUIRE(file.bad_rows.size() == 4);
  CHECK(file.bad_rows[0].line == 2);
  CHECK(has(file.bad_rows[1].reason, "an object was expected before"));
  CHECK(has(file.bad_rows[3].reason, "after the end"));
}

TEST_CASE("an array that is cut off keeps its whole elements and says so") {
  const std::string text = "[" + object("S-1") + "," + object("S-2") + "]";
  for (std::size_t size = 1; size < text.size(); ++size) {
    const ReadFile file = read_plain(text.substr(0, size), kArray);
    CHECK(file.unusable == "");
    CHECK(file.rows.size() == (size > object("S-1").size() + 1 ? 1U : 0U));
    REQUIRE(file.bad_rows.size() == 1);
    CHECK(has(file.bad_rows[0].reason, "not closed"));
  }
  CHECK(read_plain("[]", kArray).bad_rows.empty());
  CHECK(has(read_plain("", kArray).unusable, "empty"));
  CHECK(has(read_plain("{}", kArray).unusable, "a JSON array"));
  CHECK(has(read_plain(" \n", kLines).unusable, "empty"));
}

TEST_CASE("every prefix of valid JSON lines is read without harm") {
  const std::string text = object("S-1") + "\n" + object("S-2", R"(,"note":"\u00fc\n")") + "\n";
  for (std::size_t size = 0; size <= text.size(); ++size) {
    const ReadFile file =
        read_plain(text.substr(0, size), {.syntax = PlainSyntax::json_lines, .closed = false});
    CHECK(file.rows.size() == (size > object("S-1").size() ? 1U : 0U));
  }
}

TEST_CASE("an element or line beyond 1 MiB is a bad row and harms no other") {
  const std::string huge = object("S-2", ",\"note\":\"" + std::string(2U << 20U, 'x') + "\"");
  CHECK(read_plain(huge + "\n" + object("S-1") + "\n", kLines).rows.size() == 1);
  const ReadFile file = read_plain("[" + huge + "," + object("S-1") + "]", kArray);
  CHECK(file.rows.size() == 1);
  REQUIRE(file.bad_rows.size() == 1);
  CHECK(has(file.bad_rows[0].reason, "1 MiB"));
}
