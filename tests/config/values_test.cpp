// One value as text.
#include <string>
#include <vector>

#include <doctest/doctest.h>

#include "config/nearest.hpp"
#include "config/time_zone.hpp"
#include "config/url.hpp"
#include "config/utf8.hpp"
#include "config/value_text.hpp"
#include "core/base/rfc3339.hpp"

using namespace agreed;
using namespace agreed::settings_file;
using namespace std::chrono_literals;

TEST_CASE("a number is a decimal number and nothing else") {
  struct Good {
    const char* text;
    double value;
  };
  for (const Good& good : {Good{"0", 0}, Good{"10.5", 10.5}, Good{"-3", -3}, Good{"+2", 2}, Good{"1e3", 1000},
                           Good{"1.5E-2", 0.015}, Good{"0.20", 0.2}, Good{"-0.0", 0}})
    CHECK_MESSAGE(number_of(good.text).value_or(99) == doctest::Approx(good.value), good.text);
  for (const char* bad :
       {"",      " 1",   "1 ",  "010", "-01", "0x10",  "1_000", "1,5", ".5",    "5.",    ".inf",
        "-.inf", ".nan", "inf", "nan", "1e",  "1e400", "--1",   "+-1", "1.2.3", "1e3.5", "e5"})
    CHECK_MESSAGE(!number_of(bad), bad);
}

TEST_CASE("a whole number has neither point nor exponent and must fit") {
  CHECK(whole_number_of("42") == 42);
  CHECK(whole_number_of("-7") == -7);
  CHECK(whole_number_of("0") == 0);
  for (const char* bad : {"", "1.0", "1e3", "08", "0x8", "99999999999999999999", "-", "+"})
    CHECK_MESSAGE(!whole_number_of(bad), bad);
}

TEST_CASE("durations have a whole number and one unit") {
  CHECK(duration_of("500ms") == Duration(500));
  CHECK(duration_of("30s") == Duration(30s));
  CHECK(duration_of("15min") == Duration(15min));
  CHECK(duration_of("8h") == Duration(8h));
  CHECK(duration_of("30d") == Duration(30 * 24h));
  CHECK(duration_of("0s") == Duration(0));
  for (const char* bad : {"", "8", "h", "8 h", "1.5h", "-8h", "+8h", "08h", "8H", "8m", "2w", "1h30min",
                          "99999999999999999999d", "9223372036854775807d", "40000d"})
    CHECK_MESSAGE(!duration_of(bad), bad);
}

TEST_CASE("a duration is shown as it may be written") {
  for (const char* text : {"500ms", "30s", "15min", "8h", "30d", "36h", "90min", "0s"})
    CHECK(shown(duration_of(text).value()) == text);
}

TEST_CASE("times need their offset; a date alone is its midnight in UTC") {
  CHECK(to_rfc3339(time_of("2026-01-05T06:00:00Z").value()) == "2026-01-05T06:00:00.000Z");
  CHECK(to_rfc3339(time_of("2026-01-05T06:00:00+02:00").value()) == "2026-01-05T04:00:00.000Z");
  CHECK(to_rfc3339(time_of("2000-01-01").value()) == "2000-01-01T00:00:00.000Z");
  for (const char* bad : {"", "2026-01-05T06:00:00", "2026-02-30", "05.01.2026", "yesterday"})
    CHECK_MESSAGE(!time_of(bad), bad);
}

TEST_CASE("ids") {
  for (const std::string& good :
       {std::string("a"), std::string("wheat-low"), std::string("9_x"), std::string(64, 'z')})
    CHECK_MESSAGE(is_id(good), good);
  for (const std::string& bad : {std::string(), std::string("-a"), std::string("_a"), std::string("a b"),
                                 std::string("a.b"), std::string("\xC3\xA9"), std::string(65, 'z')})
    CHECK_MESSAGE(!is_id(bad), bad);
}

TEST_CASE("what is shown is short, in one line, and never cuts a character in two") {
  CHECK(shown("abc") == "'abc'");
  CHECK(shown("a\nb\x7F") == "'a\\x0ab\\x7f'");
  std::string umlauts;
  for (int i = 0; i < 50; ++i) umlauts += "\xC3\xA9";
  const std::string cut = shown(umlauts);
  CHECK(cut.size() < 70);
  CHECK_FALSE(first_bad_utf8(cut).has_value());
}

TEST_CASE("the edit distance counts exchanged neighbours as one") {
  CHECK(edit_distance("", "abc") == 3);
  CHECK(edit_distance("confirm", "confirm") == 0);
  CHECK(edit_distance("confrim", "confirm") == 1);
  CHECK(edit_distance("Confirm", "confirm") == 0);
  CHECK(edit_distance("kitten", "sitting") == 3);
  CHECK(edit_distance("ca", "abc") == 3);  // 2 for the unrestricted distance
}

TEST_CASE("only a name that may be meant is suggested") {
  const std::vector<std::string> names = {"confidence", "confirm", "every", "x", "y"};
  CHECK(nearest("confrim", names) == "confirm");
  CHECK(nearest("evry", names) == "every");
  CHECK(nearest("conf", names) == "confidence");  // begins it
  CHECK_FALSE(nearest("wavelength", names).has_value());
  CHECK_FALSE(nearest("", names).has_value());
  CHECK_FALSE(nearest(std::string(10'000, 'x'), names).has_value());
}

TEST_CASE("URLs of webhooks") {
  const auto parts = url_parts("https://chat.harrow.example:8443/hooks/a1?b=c");
  REQUIRE(parts.has_value());
  CHECK(parts->encrypted);
  CHECK(parts->host == "chat.harrow.example");
  CHECK(parts->origin == "https://chat.harrow.example:8443");
  CHECK(url_parts("http://[::1]:9099/x")->host == "::1");
  for (const char* bad : {"", "ftp://a/b", "https://", "https:///x", "https://a b/", "https://me:pw@host/",
                          "//host/x", "https://host:0/", "https://host:99999/", "https://host:+80/",
                          "https://host:/", "http://[::1/x", "https://h\xC3\xA9/", "https://-a/"})
    CHECK_MESSAGE(!url_parts(bad), bad);
  for (const char* here : {"127.0.0.1", "127.9.9.9", "::1", "localhost"})
    CHECK_MESSAGE(is_loopback(here), here);
  for (const char* there : {"0.0.0.0", "::", "10.0.0.1", "127.0.0.1.example", "localhost.example"})
    CHECK_MESSAGE(!is_loopback(there), there);
}

TEST_CASE("time zones are those of the system") {
  for (const char* zone : {"UTC", "Europe/Dublin", "America/Argentina/Buenos_Aires"})
    CHECK_MESSAGE(is_zone(zone), zone);
  for (const char* none :
       {"", "Europe", "Europe/Nowhere", "zone.tab", "/etc/localtime", "../zoneinfo/UTC", "Europe/Dublin "})
    CHECK_MESSAGE(!is_zone(none), none);
}

TEST_CASE("UTF-8 as RFC 3629 has it") {
  CHECK_FALSE(first_bad_utf8("a\xC3\xA9\xE2\x82\xAC\xF0\x9F\x98\x80").has_value());
  CHECK(first_bad_utf8("ab\xFF") == 2);
  CHECK(first_bad_utf8("\xC3") == 0);              // cut off
  CHECK(first_bad_utf8("\xC0\xAF") == 0);          // overlong
  CHECK(first_bad_utf8("\xE0\x80\xAF") == 0);      // overlong
  CHECK(first_bad_utf8("\xED\xA0\x80") == 0);      // surrogate
  CHECK(first_bad_utf8("\xF4\x90\x80\x80") == 0);  // beyond U+10FFFF
  CHECK(first_bad_utf8("a\xA9") == 1);             // a middle byte alone
}
