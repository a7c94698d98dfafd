// The gate on random bytes, and the taking apart of targets.
#include "daemon/http/gate.hpp"

#include <random>

#include <doctest/doctest.h>

#include "daemon/http/target.hpp"

using namespace agreed;

TEST_CASE("whatever the bytes, the gate says one thing at most and what it passes on is clean") {
  constexpr unsigned seed = 20260105;
  MESSAGE("seed " << seed);
  std::mt19937 random(seed);
  const std::string good = "POST /a?b=c HTTP/1.1\r\nHost: h\r\nContent-Length: 3\r\nAccept: x\r\n\r\nabc";
  const GateLimits limits{256, 64, 8, 16};
  int passed = 0, refused = 0, waiting = 0;
  for (int round = 0; round < 20000; ++round) {
    std::string bytes = good;
    for (unsigned i = random() % 4; i > 0; --i) {
      const std::size_t at = random() % bytes.size();
      switch (random() % 3) {
        case 0:
          bytes[at] = static_cast<char>(random() % 256);
          break;
        case 1:
          bytes.erase(at, random() % 5);
          break;
        default:
          bytes.insert(at, bytes.substr(random() % bytes.size(), random() % 60));
          break;
      }
      if (bytes.empty()) bytes.push_back('x');
    }
    const Gated gated = look_at(bytes, limits);
    if (gated.refusal.status != 0) {
      ++refused;
      CHECK(gated.refusal.status >= 400);
      continue;
    }
    if (!gated.head_complete) {
      ++waiting;
      CHECK(bytes.size() <= limits.head);
      continue;
    }
    ++passed;
    CHECK(gated.head_length <= bytes.size());
    CHECK(gated.body_length <= limits.body);
    CHECK(gated.target.front() == '/');
    CHECK(gated.head.find('\0') == std::string::npos);
    CHECK(gated.head.find("\r\n\r\n") == gated.head.size() - 4);
  }
  CHECK(passed > 1000);
  CHECK(refused > 1000);
  CHECK(waiting > 100);
}

TEST_CASE("a head is waited for until its limit, whatever way it is cut") {
  const std::string whole = "GET / HTTP/1.1\r\nHost: h\r\n\r\n";
  for (std::size_t length = 0; length < whole.size(); ++length) {
    const Gated gated = look_at(whole.substr(0, length), {});
    CHECK_FALSE(gated.head_complete);
    CHECK(gated.refusal.status == 0);
  }
  const Gated gated = look_at(whole + "GET", {});
  CHECK(gated.head_complete);
  CHECK(gated.head_length == whole.size());
}

TEST_CASE("an empty line before the request is passed over") {
  const Gated gated = look_at("\r\nGET /a HTTP/1.1\r\nHost: h\r\n\r\n", {});
  CHECK(gated.head_complete);
  CHECK(gated.refusal.status == 0);
  CHECK(gated.target == "/a");
  CHECK(gated.head_length == 30);
}

TEST_CASE("the library sees the few fields that matter and none that multiply work") {
  const Gated gated = look_at(
      "GET / HTTP/1.1\r\nHost: h\r\nRange: bytes=0-\r\nAccept-Encoding: gzip\r\nExpect: x\r\nREMOTE_ADDR: "
      "1\r\n"
      "Connection: Upgrade, close\r\nIF-NONE-MATCH:  \"a\" \r\n\r\n",
      {});
  CHECK(gated.refusal.status == 0);
  CHECK(gated.close);
  CHECK(gated.head == "GET / HTTP/1.1\r\nhost: h\r\nif-none-match: \"a\"\r\n\r\n");
}

TEST_CASE("targets are taken apart by our own rules") {
  const auto target = take_apart("/charts/line1/wheat%2Dlow?points=5&note=a+b%2Bc&flag&=x");
  REQUIRE(target);
  CHECK(target->segments == std::vector<std::string>{"charts", "line1", "wheat-low"});
  REQUIRE(target->parameter("points"));
  CHECK(*target->parameter("points") == "5");
  CHECK(*target->parameter("note") == "a b+c");
  CHECK(target->parameter("flag")->empty());
  CHECK_FALSE(target->parameter("absent"));
  CHECK(take_apart("/")->segments.empty());
  for (const char* bad : {"", "a", "//", "/a/", "/a//b", "/..", "/a/..", "/%2e", "/a%2fb", "/a%5Cb", "/%00",
                          "/%1f", "/%7F", "/%", "/%4", "/%4x", "?a=b"}) {
    CAPTURE(bad);
    CHECK_FALSE(take_apart(bad));
  }
}
