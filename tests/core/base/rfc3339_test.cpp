#include "core/base/rfc3339.hpp"

#include <doctest/doctest.h>

using namespace agreed;

namespace {
std::int64_t epoch_ms(const char* text) {
  const auto parsed = parse_rfc3339(text);
  REQUIRE(parsed);
  CHECK(parsed->offset_given);
  return parsed->at.time_since_epoch().count();
}
}  // namespace

// The example strings of RFC 3339 section 5.8, epochs worked out from their offsets.
TEST_CASE("the examples of RFC 3339 are read") {
  CHECK(epoch_ms("1985-04-12T23:20:50.52Z") == 482196050520);
  CHECK(epoch_ms("1996-12-20T00:39:57Z") == 851042397000);
  CHECK(epoch_ms("1996-12-19T16:39:57-08:00") == 851042397000);
  CHECK(epoch_ms("1937-01-01T12:00:27.87+00:20") == -1041337172130);
  CHECK(epoch_ms("1990-12-31T23:59:60Z") == epoch_ms("1990-12-31T23:59:59.999Z"));
}

TEST_CASE("lower case, a space and digits beyond the millisecond are read") {
  CHECK(epoch_ms("2026-01-05t06:00:00z") == epoch_ms("2026-01-05 06:00:00Z"));
  CHECK(epoch_ms("2026-01-05T06:00:00.1239999Z") == epoch_ms("2026-01-05T06:00:00.123Z"));
}

TEST_CASE("a time without an offset says so") {
  const auto parsed = parse_rfc3339("2026-01-05T06:00:00");
  REQUIRE(parsed);
  CHECK_FALSE(parsed->offset_given);
  CHECK(to_rfc3339(parsed->at) == "2026-01-05T06:00:00.000Z");
}

TEST_CASE("what is no time is refused") {
  for (const char* text : {"", "2026", "2026-01-05", "2026-13-05T06:00:00Z", "2026-02-30T06:00:00Z",
                           "2026-01-05T24:00:00Z", "2026-01-05T06:60:00Z", "2026-01-05T06:00:61Z",
                           "2026-01-05T06:00Z", "2026-01-05T06:00:00+1", "2026-01-05T06:00:00+01:00x",
                           "2026-01-05T06:00:00.Z", "05.01.2026 06:00:00", "2026-01-05T06:00:00 Z"}) {
    CAPTURE(text);
    CHECK_FALSE(parse_rfc3339(text));
  }
}

TEST_CASE("text and time agree both ways") {
  for (const std::int64_t ms : {0LL, -1LL, 951782400000LL, 4102444799999LL}) {
    const Instant at{Duration{ms}};
    CHECK(parse_rfc3339(to_rfc3339(at))->at == at);
  }
}
