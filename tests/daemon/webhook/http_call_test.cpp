#include "daemon/webhook/http_call.hpp"

#include <algorithm>
#include <chrono>
#include <thread>

#include <doctest/doctest.h>

#include "tests/daemon/webhook/receiver.hpp"

using namespace agreed;
using namespace std::chrono_literals;
using test::answer;
using test::Receiver;

namespace {

CallRequest to(const std::string& url) {
  CallRequest request;
  request.url = url;
  request.content_type = "application/cloudevents+json";
  request.body = std::string("{\"a\":\"\0\xff b\"}", 12);
  request.headers = {{"webhook-id", "msg_1"}};
  return request;
}

CallLimits quick() {
  CallLimits limits;
  limits.whole = 400ms;
  limits.connect = 300ms;
  return limits;
}

struct Timed {
  CallAnswer answer;
  Duration took{};
};

Timed timed(const CallRequest& request, const CallLimits& limits, const std::stop_token& stop = {}) {
  const auto start = std::chrono::steady_clock::now();
  Timed result{http_call(request, limits, stop), {}};
  result.took = std::chrono::duration_cast<Duration>(std::chrono::steady_clock::now() - start);
  return result;
}

}  // namespace

TEST_CASE("a post carries its headers and exactly its bytes") {
  Receiver receiver({answer(204)});
  const auto result = http_call(to(receiver.url("/a/b?c=d%20e+f#g")), {}, {});
  CHECK(result.status == 204);
  CHECK(result.error.empty());
  const auto got = receiver.wait_for(1);
  REQUIRE(got.size() == 1);
  CHECK(got[0].head.rfind("POST /a/b?c=d%20e+f HTTP/1.1\r\n", 0) == 0);
  CHECK(got[0].header("content-type") == "application/cloudevents+json");
  CHECK(got[0].header("webhook-id") == "msg_1");
  CHECK(got[0].header("accept-encoding").empty());
  CHECK(got[0].body == to("").body);
}

TEST_CASE("a get carries its headers and neither a body nor its type") {
  Receiver receiver({answer(200)});
  CallRequest request;
  request.method = "GET";
  request.url = receiver.url("/api/status");
  request.headers = {{"Accept", "application/json"}};
  CHECK(http_call(request, {}, {}).status == 200);
  const auto got = receiver.wait_for(1);
  REQUIRE(got.size() == 1);
  CHECK(got[0].head.rfind("GET /api/status HTTP/1.1\r\n", 0) == 0);
  CHECK(got[0].header("accept") == "application/json");
  CHECK(got[0].header("content-type").empty());
  CHECK(got[0].body.empty());
}

TEST_CASE("a redirect is an answer and is not followed") {
  Receiver elsewhere({answer(200)});
  Receiver receiver({answer(302, "Location: " + elsewhere.url() + "\r\n")});
  CHECK(http_call(to(receiver.url()), {}, {}).status == 302);
  CHECK(receiver.wait_for(1).size() == 1);
  CHECK(http_call(to(elsewhere.url("/mine")), {}, {}).status == 200);
  CHECK(elsewhere.wait_for(1).size() == 1);
}

TEST_CASE("a hanging endpoint is left at the deadline, one that nobody listens at right away") {
  Receiver receiver({test::hang()});
  const auto hung = timed(to(receiver.url()), quick());
  CHECK(hung.answer.status == 0);
  CHECK(hung.answer.error.find("no answer came within") == 0);
  CHECK_FALSE(hung.answer.stopped);
  CHECK(hung.took >= 400ms);
  CHECK(hung.took < 2s);
  int port = 0;
  { port = Receiver({answer(200)}).port(); }
  const auto refused = timed(to("http://127.0.0.1:" + std::to_string(port)), quick());
  CHECK(refused.answer.status == 0);
  CHECK(refused.answer.error == "no connection could be made");
}

TEST_CASE("a head that trickles for ever is left at the deadline") {
  Receiver receiver({[](const auto& send) {
    send("HTTP/1.1 200 OK\r\n");
    for (int i = 0; send("X-" + std::to_string(i) + ": y\r\n"); ++i) std::this_thread::sleep_for(20ms);
  }});
  const auto result = timed(to(receiver.url()), quick());
  CHECK(result.answer.status == 0);
  CHECK(result.took < 2s);
}

TEST_CASE("once the head has come its status is the answer, though the rest trickles for ever") {
  Receiver receiver({[](const auto& send) {
    send("HTTP/1.1 202 X\r\nContent-Length: 1000000\r\n\r\n");
    while (send("x")) std::this_thread::sleep_for(20ms);
  }});
  const auto result = timed(to(receiver.url()), quick());
  CHECK(result.answer.status == 202);
  CHECK(result.answer.error.empty());
  CHECK(result.took < 2s);
}

TEST_CASE("of an endless answer only the limit is read, and it is not decompressed") {
  for (const char* framing : {"Transfer-Encoding: chunked\r\n", "Content-Encoding: gzip\r\n"}) {
    CAPTURE(framing);
    Receiver receiver({[framing](const auto& send) {
      const bool chunked = std::string(framing).front() == 'T';
      send(std::string("HTTP/1.1 200 X\r\n") + framing + "\r\n");
      const std::string block(4096, 'x');
      while (send(chunked ? "1000\r\n" + block + "\r\n" : block)) {
      }
    }});
    CallLimits limits;
    const auto result = timed(to(receiver.url()), limits);
    CHECK(result.answer.status == 200);
    CHECK(result.answer.body.size() == limits.answer);
    CHECK(std::all_of(result.answer.body.begin(), result.answer.body.end(), [](char c) { return c == 'x'; }));
    CHECK(result.took < 5s);
  }
}

TEST_CASE("a stop ends a hanging call at once and says that nothing is known") {
  Receiver receiver({test::hang()});
  std::stop_source stop;
  std::thread later([&] {
    (void)receiver.wait_for(1);
    stop.request_stop();
  });
  const auto result = timed(to(receiver.url()), {}, stop.get_token());
  later.join();
  CHECK(result.answer.stopped);
  CHECK(result.answer.status == 0);
  CHECK(result.took < 5s);
}

TEST_CASE("Retry-After is handed on; an answer that is no HTTP is a failure") {
  Receiver receiver({answer(503, "Retry-After: 120\r\n"),
                     [](const auto& send) { send("220 smtp ready\r\n\r\n"); }, [](const auto&) {}});
  CHECK(http_call(to(receiver.url()), {}, {}).retry_after == "120");
  CHECK(http_call(to(receiver.url()), quick(), {}).status == 0);
  const auto closed = http_call(to(receiver.url()), quick(), {});
  CHECK(closed.status == 0);
  CHECK_FALSE(closed.error.empty());
}

TEST_CASE("what is no plain http(s) URL is refused in words") {
  for (const char* url : {"", "ftp://h/", "http://", "http://user:pw@127.0.0.1/", "http://127.0.0.1/a b",
                          "http://127.0.0.1/\r\nX: y", "http://127.0.0.1:99999999/", "https://[::1"}) {
    CAPTURE(url);
    const auto result = timed(to(url), quick());
    CHECK(result.answer.status == 0);
    CHECK_FALSE(result.answer.error.empty());
    CHECK(result.answer.error.find("pw") == std::string::npos);
    CHECK(result.took < 2s);
  }
}
