// The whole HTTP side over a socket: what a program on the other end sees.
#include "daemon/http/http_side.hpp"

#include <atomic>

#include <doctest/doctest.h>

#include "tests/daemon/http/mill_snapshot.hpp"
#include "tests/daemon/http/raw_client.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {

AlertSource no_alerts() {
  return {[](const AlertQuery&) { return std::vector<AlertRecord>{}; },
          [](std::int64_t) -> std::optional<AlertRecord> {
            throw std::runtime_error("the journal is locked by someone");
          }};
}

struct Side {
  Side() { http.start(); }
  FakeService service{full_snapshot()};
  std::atomic<int> told{0};
  HttpSide http{{"127.0.0.1", 0, false},
                std::nullopt,
                service,
                no_alerts(),
                nullptr,
                [this](const std::string&) { ++told; }};
};

}  // namespace

TEST_CASE("status by GET, again by ETag, and by HEAD, on one connection") {
  Side side;
  RawClient client(side.http.port());
  client.send(get("/api/status"));
  const std::string first = client.read_answer();
  CHECK(status_of(first) == 200);
  CHECK(header_of(first, "Content-Type") == "application/json");
  const std::string etag = header_of(first, "ETag");
  REQUIRE(etag.size() == 34);
  client.send(get("/api/status", "If-None-Match: W/" + etag + "\r\n"));
  const std::string second = client.read_answer(true);
  CHECK(status_of(second) == 304);
  CHECK(header_of(second, "ETag") == etag);
  CHECK(header_of(second, "Content-Length") == header_of(first, "Content-Length"));
  client.send("HEAD /api/status HTTP/1.1\r\nHost: h\r\n\r\n");
  const std::string third = client.read_answer(true);
  CHECK(status_of(third) == 200);
  CHECK(header_of(third, "Content-Length") == header_of(first, "Content-Length"));
  client.send(get("/api/comparisons"));
  CHECK(body_of(client.read_answer()).find("\"levels\"") != std::string::npos);
}

TEST_CASE("without a tokens file every POST is 401, whatever its body") {
  Side side;
  RawClient client(side.http.port());
  client.send(
      "POST /api/alerts/17/acknowledge HTTP/1.1\r\nHost: h\r\nAuthorization: Bearer %6f\r\n"
      "Content-Length: 2\r\n\r\n{}");
  const std::string answer = client.read_answer();
  CHECK(status_of(answer) == 401);
  CHECK_FALSE(header_of(answer, "WWW-Authenticate").empty());
  CHECK(header_of(answer, "Content-Type") == "application/problem+json");
}

TEST_CASE("a journal that cannot be read is 500 for that request and told to the log") {
  Side side;
  RawClient client(side.http.port());
  client.send(get("/api/alerts/17") + get("/health/live"));
  const std::string answer = client.read_answer();
  CHECK(status_of(answer) == 500);
  CHECK(answer.find("locked") == std::string::npos);
  CHECK(status_of(client.read_answer()) == 200);
  CHECK(side.told == 1);
}

TEST_CASE("an address others can reach is refused before it is listened on") {
  FakeService service{full_snapshot()};
  CHECK_THROWS_WITH_AS(
      HttpSide({"0.0.0.0", 0, false}, std::nullopt, service, no_alerts(), nullptr, [](const std::string&) {}),
      doctest::Contains("open_to_network"), std::runtime_error);
}
