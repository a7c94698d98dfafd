#include "daemon/webhook/backoff.hpp"

#include <random>

#include <doctest/doctest.h>

#include "daemon/webhook/retry_after.hpp"

using namespace agreed;
using namespace std::chrono_literals;

namespace {

const Instant kNow{1770271200s};
const RetryPolicy kPolicy;

OutboxMessage message(int tries, Duration age) {
  OutboxMessage m;
  m.id = 5;
  m.tries = tries;
  m.created_at = kNow - age;
  return m;
}

}  // namespace

TEST_CASE("the wait has full jitter below a doubling bound, from a second to an hour") {
  std::mt19937 random(11);
  std::uniform_real_distribution<double> uniform(0, 1);
  for (int tries = 1; tries <= 100; ++tries) {
    CAPTURE(tries);
    const Duration bound = tries >= 12 ? Duration(1h) : Duration(1000LL << tries);
    CHECK(backoff(tries, 0.0, kPolicy) == 1s);
    CHECK(backoff(tries, 0.9999999, kPolicy) > bound - 2ms);
    CHECK(backoff(tries, 0.5, kPolicy) == std::max<Duration>(1s, bound / 2));
    for (int i = 0; i < 20; ++i) {
      const Duration wait = backoff(tries, uniform(random), kPolicy);
      REQUIRE(wait >= 1s);
      REQUIRE(wait <= bound);
    }
  }
}

TEST_CASE("2xx is delivered, everything else is not") {
  for (int status = 100; status < 600; ++status) {
    CAPTURE(status);
    const auto attempt = judge(message(0, 1s), {status, "", {}}, kNow, 0.5, kPolicy);
    CHECK(attempt.message == 5);
    CHECK(attempt.at == kNow);
    CHECK(attempt.status == status);
    CHECK(attempt.delivered == (status / 100 == 2));
    CHECK(attempt.error.empty() == attempt.delivered);
    CHECK(attempt.given_up == (status == 410));
    CHECK(attempt.next_due.has_value() == (!attempt.delivered && !attempt.given_up));
  }
  CHECK(judge(message(0, 1s), {0, "no connection could be made", {}}, kNow, 0.5, kPolicy).error ==
        "no connection could be made");
}

TEST_CASE("given up at three days, with a last try just then") {
  const auto before = judge(message(80, 72h - 10min), {503, "", {}}, kNow, 0.9, kPolicy);
  CHECK_FALSE(before.given_up);
  CHECK(before.next_due == kNow + 10min);
  const auto after = judge(message(81, 72h), {503, "", {}}, kNow, 0.9, kPolicy);
  CHECK(after.given_up);
  CHECK_FALSE(after.next_due);
}

TEST_CASE("after days switched off, or a clock set forward, the first failure is not the last try") {
  const auto first = judge(message(0, 24h * 365), {0, "refused", {}}, kNow, 0.5, kPolicy);
  CHECK_FALSE(first.given_up);
  CHECK(first.next_due > kNow);
  CHECK(judge(message(kPolicy.least_tries - 1, 24h * 365), {0, "x", {}}, kNow, 0.5, kPolicy).given_up);
}

TEST_CASE("a clock set back neither gives up nor waits longer than an hour") {
  const auto attempt = judge(message(3, -24h * 365), {500, "", {}}, kNow, 0.99, kPolicy);
  CHECK_FALSE(attempt.given_up);
  CHECK(attempt.next_due <= kNow + 1h);
}

TEST_CASE("Retry-After is honoured when it is longer than the back-off, up to an hour") {
  CHECK(judge(message(0, 1s), {429, "", 30s}, kNow, 0.0, kPolicy).next_due == kNow + 30s);
  CHECK(judge(message(0, 1s), {429, "", 24h}, kNow, 0.0, kPolicy).next_due == kNow + 1h);
  CHECK(judge(message(0, 1s), {429, "", 0s}, kNow, 0.0, kPolicy).next_due == kNow + 1s);
}

TEST_CASE("a whole life: tries are spread over three days and no wait is longer than an hour") {
  std::mt19937 random(3);
  std::uniform_real_distribution<double> uniform(0, 1);
  for (int run = 0; run < 50; ++run) {
    OutboxMessage m = message(0, 0s);
    Instant now = kNow;
    while (true) {
      const auto attempt = judge(m, {500, "", {}}, now, uniform(random), kPolicy);
      ++m.tries;
      if (attempt.given_up) break;
      REQUIRE(attempt.next_due > now);
      REQUIRE(*attempt.next_due - now <= 1h);
      now = *attempt.next_due;
    }
    CHECK(now == kNow + 72h);
    CHECK(m.tries > 90);
    CHECK(m.tries < 300);
  }
}

TEST_CASE("Retry-After is seconds or an HTTP date; anything else is as if it were not there") {
  const Instant now{std::chrono::sys_days{std::chrono::year{1994} / 11 / 6} + 8h + 49min + 7s};
  CHECK(parse_retry_after("120", now) == 120s);
  CHECK(parse_retry_after(" 0 ", now) == 0s);
  CHECK(parse_retry_after("99999999999999999999", now) == Duration(24h * 365));
  // RFC 9110, section 5.6.7: the preferred form.
  CHECK(parse_retry_after("Sun, 06 Nov 1994 08:49:37 GMT", now) == 30s);
  CHECK(parse_retry_after("Sun, 06 Nov 1994 08:49:00 GMT", now) == 0s);
  for (const char* bad : {"", "  ", "-1", "+5", "1.5", "12 s", "soon", "Sun, 06 Nov 1994 08:49:37 CET",
                          "Sun, 31 Feb 1994 08:49:37 GMT", "Sun, 06 Nov 1994 24:49:37 GMT",
                          "Sun, 06 nov 1994 08:49:37 GMT", "Sun, 06 Nov 1994 08:49:3x GMT"}) {
    CAPTURE(bad);
    CHECK_FALSE(parse_retry_after(bad, now));
  }
}
