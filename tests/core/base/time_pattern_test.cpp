#include "core/base/time_pattern.hpp"

#include <random>
#include <stdexcept>

#include <doctest/doctest.h>

using namespace agreed;

namespace {

std::string read(const char* pattern, const char* text) {
  const auto parsed = TimePattern(pattern).parse(text);
  if (!parsed) return "none";
  return to_rfc3339(parsed->at) + (parsed->offset_given ? " offset" : "");
}

}  // namespace

TEST_CASE("times are read by their pattern") {
  CHECK(read("%d.%m.%Y %H:%M:%S", "05.01.2026 06:00:07") == "2026-01-05T06:00:07.000Z");
  CHECK(read("%d.%m.%Y %H:%M:%S", "5.1.2026  6:00:07,1259") == "2026-01-05T06:00:07.125Z");
  CHECK(read("%d.%m.%Y %T", "05.01.2026 23:59:60") == "2026-01-05T23:59:59.999Z");
  CHECK(read("%m/%d/%y %I:%M %p", "01/05/26 12:30 am") == "2026-01-05T00:30:00.000Z");
  CHECK(read("%m/%d/%y %I:%M %p", "01/05/69 12:30 PM") == "1969-01-05T12:30:00.000Z");
  CHECK(read("%d-%b-%Y %R", "05-Jan-2026 06:00") == "2026-01-05T06:00:00.000Z");
  CHECK(read("%a, %d %b %Y %R", "Mon, 5 January 2026 06:00") == "2026-01-05T06:00:00.000Z");
  CHECK(read("%d.%b.%Y %R", "5.MAY.2026 06:00") == "2026-05-05T06:00:00.000Z");
  CHECK(read("%F %T%z", "2026-01-05 06:00:00+0130") == "2026-01-05T04:30:00.000Z offset");
  CHECK(read("%F %T %z", "2026-01-05 06:00:00 -01:00") == "2026-01-05T07:00:00.000Z offset");
  CHECK(read("%FT%T%z", "2026-01-05T06:00:00Z") == "2026-01-05T06:00:00.000Z offset");
  CHECK(read("%Y%m%d%H%M%S", "20260105060007") == "2026-01-05T06:00:07.000Z");
  CHECK(read("%F %H h %M 100%%", "2026-01-05 6 h 07 100%") == "2026-01-05T06:07:00.000Z");
  CHECK(read("unix_seconds", "1767592800.25") == "2026-01-05T06:00:00.250Z offset");
  CHECK(read("unix_milliseconds", "1767592800125") == "2026-01-05T06:00:00.125Z offset");
}

TEST_CASE("what is no such time is refused, whole or not at all") {
  for (const char* text :
       {"", "05.01.2026", "31.02.2026 06:00:00", "05.13.2026 06:00:00", "05.01.2026 24:00:00",
        "05.01.2026 06:60:00", "05.01.2026 06:00:61", "05.01.2026 06:00:00x", "05.01.202606:00:00",
        " 05.01.2026 06:00:00", "05.01.26 06:00:00", "05.01.12026 06:00:00", "05.01.2026 06:00:00.",
        "05/01/2026 06:00:00", "x"})
    CHECK_MESSAGE(read("%d.%m.%Y %H:%M:%S", text) == "none", text);
  CHECK(read("%F %I:%M %p", "2026-01-05 13:00 PM") == "none");
  CHECK(read("%F %I:%M %p", "2026-01-05 00:30 AM") == "none");
  CHECK(read("%d %b %Y %R", "5 Janx 2026 06:00") == "none");
  CHECK(read("%d %b %Y %R", "5 J\xC3\xA4n 2026 06:00") == "none");
  CHECK(read("%F %T%z", "2026-01-05 06:00:00+24:00") == "none");
  CHECK(read("%F %T%z", "2026-01-05 06:00:00+01:") == "none");
  for (const char* text : {"", "-1", "1e9", "12x", "1.", "99999999999999999999", "300000000000"})
    CHECK_MESSAGE(read("unix_seconds", text) == "none", text);
}

TEST_CASE("a pattern that cannot be used says why") {
  const auto fault = [](const char* pattern) { return TimePattern::fault_of(pattern); };
  CHECK(fault("%d.%m.%Y %H:%M") == "");
  CHECK(fault("%d.%m.%Y") == "it needs the hour, as %H, or %I with %p");
  CHECK(fault("%d.%m %H:%M") == "it needs the year, as %Y or %y");
  CHECK(fault("%d %Y %H:%M") == "it needs the month, as %m or %b");
  CHECK(fault("%m %Y %H:%M") == "it needs the day, as %d");
  CHECK(fault("%F %I:%M") == "%I and %p go together");
  CHECK(fault("%F %H") == "it needs the minute, as %M");
  CHECK(fault("%F %T %S") == "it has %S twice");
  CHECK(fault("%F %T %Q").starts_with("it has %Q; known are %Y"));
  CHECK(fault("%F %T %") == "it ends with a single %");
  CHECK_THROWS_AS(TimePattern("%F"), std::invalid_argument);
}

TEST_CASE("the example of a pattern is read by it") {
  for (const char* pattern : {"%d.%m.%Y %H:%M:%S", "%m/%d/%y %I:%M %p", "%a %d %b %Y %R %z", "%Y%m%d%H%M",
                              "unix_seconds", "unix_milliseconds"}) {
    const TimePattern parts(pattern);
    CHECK_MESSAGE(parts.parse(parts.example()), pattern);
  }
}

TEST_CASE("random times written in a pattern come back") {
  std::mt19937_64 random(7482);
  const TimePattern pattern("%d/%m/%Y %H.%M.%S");
  for (int i = 0; i < 2'000; ++i) {
    const Instant when{Duration{static_cast<std::int64_t>(random() % 2'000'000'000'000)}};
    const std::string iso = to_rfc3339(when);  // 2026-01-05T06:00:00.000Z
    const std::string text = iso.substr(8, 2) + "/" + iso.substr(5, 2) + "/" + iso.substr(0, 4) + " " +
                             iso.substr(11, 2) + "." + iso.substr(14, 2) + "." + iso.substr(17, 6);
    REQUIRE(pattern.parse(text));
    CHECK(pattern.parse(text)->at == when);
  }
}
