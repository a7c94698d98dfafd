// Every weakness of the packaged HTTP library that concerns a server, shown closed over a bare socket.
#include "daemon/http/server.hpp"

#include <atomic>
#include <list>
#include <mutex>
#include <thread>
#include <vector>

#include <doctest/doctest.h>

#include "daemon/http/problem.hpp"
#include "tests/daemon/http/raw_client.hpp"

using namespace agreed;
using namespace agreed::test;

namespace {

/// For the tests of deadlines.
ServerLimits short_limits() {
  ServerLimits limits;
  limits.request = Milliseconds(400);
  limits.idle = Milliseconds(600);
  limits.write = Milliseconds(600);
  limits.linger = Milliseconds(300);
  return limits;
}

/// A server that shows what it was asked: the target, and the body in brackets.
struct Running {
  explicit Running(ServerLimits limits = {})
      : server(
            {"127.0.0.1", 0, false}, [this](const HttpRequest& request) { return answer(request); },
            [this](const std::string& words) {
              const std::scoped_lock lock(mutex);
              told += words;
            },
            limits) {
    server.start();
  }

  HttpAnswer answer(const HttpRequest& request) {
    ++requests;
    if (request.target == "/throw") throw std::runtime_error("secret of the house");
    if (request.target == "/throw-int") throw 7;  // NOLINT: what is not an exception class must not end us
    if (request.target == "/slow") std::this_thread::sleep_for(Milliseconds(100));
    if (request.target == "/big") return {200, "text/plain", std::string(8'000'000, 'x'), "", {}};
    return {200, "text/plain", request.target + " [" + request.body + "]" + request.authorization, "", {}};
  }

  std::string ask(const std::string& bytes) {
    RawClient client(server.port());
    client.send(bytes);
    return client.read_answer();
  }

  std::mutex mutex;
  std::string told;
  std::atomic<int> requests{0};
  HttpServer server;
};

std::string path_of(const std::string& segment) {
  return std::string(1, '/').append(segment);
}

std::string post(const std::string& headers, const std::string& body) {
  return "POST /p HTTP/1.1\r\nHost: h\r\n" + headers + "\r\n" + body;
}

std::chrono::milliseconds time_of(const std::function<void()>& what) {
  const auto begin = std::chrono::steady_clock::now();
  what();
  return std::chrono::duration_cast<Milliseconds>(std::chrono::steady_clock::now() - begin);
}

}  // namespace

TEST_CASE("an answer comes in one piece with the headers that protect it, and the connection is kept") {
  Running running;
  RawClient client(running.server.port());
  for (int i = 0; i < 3; ++i) {
    client.send(get("/a"));
    const std::string answer = client.read_answer();
    CHECK(status_of(answer) == 200);
    CHECK(body_of(answer) == "/a []");
    CHECK(header_of(answer, "Content-Security-Policy") == "default-src 'self'");
    CHECK(header_of(answer, "X-Content-Type-Options") == "nosniff");
    CHECK(header_of(answer, "Referrer-Policy") == "no-referrer");
    CHECK(header_of(answer, "Cache-Control") == "no-cache");
    CHECK(header_of(answer, "Server").empty());
    CHECK(header_of(answer, "Date").size() == 29);
  }
}

TEST_CASE("keep-alive requests are answered at once: no Nagle delay of 40 ms each") {
  Running running;
  RawClient client(running.server.port());
  const auto spent = time_of([&] {
    for (int i = 0; i < 50; ++i) {
      client.send(get("/a"));
      REQUIRE(status_of(client.read_answer()) == 200);
    }
  });
  CHECK(spent < Milliseconds(1000));
}

TEST_CASE("HEAD is answered like GET without the body") {
  Running running;
  RawClient client(running.server.port());
  client.send("HEAD /abc HTTP/1.1\r\nHost: h\r\n\r\n" + get("/next"));
  const std::string answer = client.read_answer(true);
  CHECK(status_of(answer) == 200);
  CHECK(header_of(answer, "Content-Length") == "7");
  CHECK(body_of(client.read_answer()) == "/next []");
}

TEST_CASE("an endless header line is refused at the limit, not read") {
  Running running;
  RawClient client(running.server.port());
  client.send("GET / HTTP/1.1\r\nHost: h\r\nX: ");
  const std::string piece(4096, 'a');
  bool open = true;
  for (int i = 0; i < 2000 && open; ++i) open = client.send(piece);  // 8 MB
  CHECK_FALSE(open);
  Running other;
  const std::string answer = other.ask("GET / HTTP/1.1\r\nHost: h\r\nX: " + std::string(9000, 'a'));
  CHECK(status_of(answer) == 431);
  CHECK(header_of(answer, "Content-Type") == "application/problem+json");
  CHECK(header_of(answer, "Connection") == "close");
  CHECK(other.requests == 0);
}

TEST_CASE("a huge number of header fields is refused") {
  Running running;
  std::string fields;
  for (int i = 0; i < 65; ++i) fields += "A: b\r\n";
  CHECK(status_of(running.ask(get("/", fields))) == 431);
  for (int i = 0; i < 20000; ++i) fields += "A: b\r\n";
  CHECK(status_of(running.ask(get("/", fields))) == 431);
  CHECK(running.requests == 0);
}

TEST_CASE("a head trickled byte by byte is ended by one deadline, with 408") {
  Running running(short_limits());
  RawClient client(running.server.port());
  const std::string head = get("/", "X: " + std::string(500, 'a') + "\r\n");
  std::string answer;
  const auto spent = time_of([&] {
    for (std::size_t i = 0; i < head.size() && answer.empty(); ++i) {
      client.send(head.substr(i, 1));
      answer = client.read_answer(false, Milliseconds(20));
    }
  });
  CHECK(status_of(answer) == 408);
  CHECK(spent > Milliseconds(350));
  CHECK(spent < Milliseconds(1500));
  CHECK(running.requests == 0);
}

TEST_CASE("a trickled body falls under the same deadline") {
  Running running(short_limits());
  RawClient client(running.server.port());
  client.send(post("Content-Length: 1000\r\n", "a"));
  std::string answer;
  for (int i = 0; i < 100 && answer.empty(); ++i) {
    client.send("a");
    answer = client.read_answer(false, Milliseconds(20));
  }
  CHECK(status_of(answer) == 408);
  CHECK(running.requests == 0);
}

TEST_CASE("a body needs one plain Content-Length within the limit") {
  Running running;
  CHECK(body_of(running.ask(post("Content-Length: 3\r\n", "abc"))) == "/p [abc]");
  const int served = running.requests;
  CHECK(status_of(running.ask(post("Transfer-Encoding: chunked\r\n", "3\r\nabc\r\n0\r\n\r\n"))) == 411);
  CHECK(status_of(running.ask(post("Transfer-Encoding: chunked\r\nContent-Length: 3\r\n", "abc"))) == 400);
  CHECK(status_of(running.ask(post("Content-Length: 3\r\nContent-Length: 3\r\n", "abc"))) == 400);
  CHECK(status_of(running.ask(post("Content-Length: 3\r\nContent-Length: 4\r\n", "abcd"))) == 400);
  CHECK(status_of(running.ask(post("Content-Length: 3, 3\r\n", "abc"))) == 400);
  CHECK(status_of(running.ask(post("Content-Length: -3\r\n", "abc"))) == 400);
  CHECK(status_of(running.ask(post("Content-Length: +3\r\n", "abc"))) == 400);
  CHECK(status_of(running.ask(post("Content-Length: 0x3\r\n", "abc"))) == 400);
  CHECK(status_of(running.ask(post("Content-Length:\r\n", ""))) == 400);
  CHECK(status_of(running.ask(post("Content-Length: 99999999999999999999999\r\n", "abc"))) == 413);
  CHECK(status_of(running.ask(post("", "abc"))) == 411);
  CHECK(status_of(running.ask(post("Content-Encoding: gzip\r\nContent-Length: 3\r\n", "abc"))) == 415);
  CHECK(running.requests == served);
}

TEST_CASE("a body announced beyond the limit is refused before it is sent") {
  Running running;
  RawClient client(running.server.port());
  client.send(post("Content-Length: 100000000\r\n", ""));
  const auto spent = time_of([&] { CHECK(status_of(client.read_answer()) == 413); });
  CHECK(spent < Milliseconds(1000));
  client.read_to_end();
  CHECK(client.closed());
}

TEST_CASE("the body of a refused request is never taken for a second request") {
  Running running;
  RawClient client(running.server.port());
  client.send(post("Content-Length: 50000\r\n", std::string(5000, ' ') + get("/smuggled")));
  const std::string all = client.read_to_end();
  CHECK(count_of(all, "HTTP/1.1 ") == 1);
  CHECK(status_of(all) == 413);
  CHECK(client.closed());
  CHECK(running.requests == 0);
}

TEST_CASE("a body with GET is read over and not taken for a request") {
  Running running;
  RawClient client(running.server.port());
  client.send(
      get("/first", "Content-Length: 22\r\n").append("GET /smuggled HTTP/1.1").append(get("/second")));
  CHECK(body_of(client.read_answer()) == "/first [GET /smuggled HTTP/1.1]");
  CHECK(body_of(client.read_answer()) == "/second []");
  CHECK(running.requests == 2);
}

TEST_CASE("requests sent in one piece are all answered, in order") {
  Running running;
  RawClient client(running.server.port());
  std::string all;
  for (int i = 0; i < 20; ++i) all += get(path_of(std::to_string(i)));
  client.send(all);
  for (int i = 0; i < 20; ++i)
    CHECK(body_of(client.read_answer()) == path_of(std::to_string(i)).append(" []"));
}

TEST_CASE("a request cut anywhere into two pieces is answered as if whole") {
  Running running;
  const std::string whole = post("Content-Length: 3\r\n", "abc");
  for (std::size_t cut = 1; cut < whole.size(); ++cut) {
    CAPTURE(cut);
    RawClient client(running.server.port());
    client.send(whole.substr(0, cut));
    client.send(whole.substr(cut));
    CHECK(body_of(client.read_answer()) == "/p [abc]");
  }
}

TEST_CASE("100 Continue is sent to a client that waits for it") {
  Running running;
  RawClient client(running.server.port());
  client.send(post("Expect: 100-continue\r\nContent-Length: 3\r\n", ""));
  CHECK(status_of(client.read_answer(true)) == 100);
  client.send("abc");
  CHECK(body_of(client.read_answer()) == "/p [abc]");
}

TEST_CASE("doubtful heads are refused") {
  Running running;
  const std::vector<std::pair<std::string, int>> heads = {
      {"GET / HTTP/1.1\r\n\r\n", 400},                           // no Host
      {"GET / HTTP/1.1\r\nHost: a\r\nHost: b\r\n\r\n", 400},     // two
      {"GET / HTTP/1.1\r\nHost: h\r\nA : b\r\n\r\n", 400},       // space before the colon
      {"GET / HTTP/1.1\r\nHost: h\r\nA: b\r\n c\r\n\r\n", 400},  // folded
      {"GET / HTTP/1.1\r\nHost: h\r\nnonsense\r\n\r\n", 400},    // no colon
      {"GET / HTTP/1.1\r\nHost: h\r\nA: b\nB: c\r\n\r\n", 400},  // bare LF
      {"GET / HTTP/1.1\r\nHost: h\r\nA: b\rB: c\r\n\r\n", 400},  // bare CR
      {std::string("GET / HTTP/1.1\r\nHost: h\r\nA: b\0c\r\n\r\n", 39), 400},
      {"GET  / HTTP/1.1\r\nHost: h\r\n\r\n", 400},
      {"GET / x HTTP/1.1\r\nHost: h\r\n\r\n", 400},
      {"GET /\r\nHost: h\r\n\r\n", 400},  // HTTP/0.9
      {"GET http://elsewhere/ HTTP/1.1\r\nHost: h\r\n\r\n", 400},
      {"GET / HTTP/2.0\r\nHost: h\r\n\r\n", 505},
      {"BREW / HTTP/1.1\r\nHost: h\r\n\r\n", 501},
      {"\x16\x03\x01 TLS at the wrong door\r\n\r\n", 400},
  };
  for (const auto& [head, status] : heads) {
    CAPTURE(head);
    const std::string answer = running.ask(head);
    CHECK(status_of(answer) == status);
    CHECK(header_of(answer, "Connection") == "close");
  }
  CHECK(running.requests == 0);
}

TEST_CASE("a path of 8,000 bytes is refused and kills nothing") {
  Running running;
  CHECK(status_of(running.ask(get(path_of(std::string(8000, 'a'))))) == 414);
  CHECK(status_of(running.ask(get(path_of(std::string(80000, 'a'))))) == 414);
  CHECK(status_of(running.ask(get(path_of(std::string(2047, 'a'))))) == 200);
}

TEST_CASE("Connection: close is honoured in any case of letters, and HTTP/1.0 means it") {
  Running running;
  for (const std::string& head :
       {get("/", "Connection: Close\r\n"), get("/", "connection: keep-alive, CLOSE\r\n"),
        std::string("GET / HTTP/1.0\r\n\r\n")}) {
    CAPTURE(head);
    RawClient client(running.server.port());
    client.send(head);
    const std::string answer = client.read_to_end(Milliseconds(2000));
    CHECK(status_of(answer) == 200);
    CHECK(header_of(answer, "Connection") == "close");
    CHECK(client.closed());
  }
}

TEST_CASE("Range multiplies nothing: the whole body comes once") {
  Running running;
  std::string ranges = "Range: bytes=0-";
  for (int i = 0; i < 50; ++i) ranges += ",0-";
  const std::string answer = running.ask(get("/a", ranges + "\r\n"));
  CHECK(status_of(answer) == 200);
  CHECK(body_of(answer) == "/a []");
}

TEST_CASE("header values cannot bring in fields of their own") {
  Running running;
  const std::string answer = running.ask(
      get("/a", "REMOTE_ADDR: 10.0.0.1\r\nAccept-Encoding: gzip\r\nX: %0D%0ASet-Cookie: a=b\r\n"));
  CHECK(body_of(answer) == "/a []");
  CHECK(answer.find("Set-Cookie") == std::string::npos);
  CHECK(header_of(answer, "Content-Encoding").empty());
}

TEST_CASE("64 slow and silent clients do not keep the 65th waiting") {
  Running running;
  std::list<RawClient> slow;
  for (int i = 0; i < 64; ++i) {
    slow.emplace_back(running.server.port());
    if (i % 3 == 1) slow.back().send("GET / HTTP/1.1\r\nHost: h\r\nX: a");
    if (i % 3 == 2) {
      slow.back().send(get("/kept"));
      REQUIRE(status_of(slow.back().read_answer()) == 200);
    }
  }
  const auto spent = time_of([&] { CHECK(status_of(running.ask(get("/a"))) == 200); });
  CHECK(spent < Milliseconds(1000));
}

TEST_CASE("beyond the cap the client that waits longest has to go, and the newest is answered") {
  ServerLimits limits;
  limits.connections = 8;
  limits.request = limits.idle = Milliseconds(60'000);
  Running running(limits);
  std::list<RawClient> silent;
  for (int i = 0; i < 40; ++i) silent.emplace_back(running.server.port());
  const auto spent = time_of([&] { CHECK(status_of(running.ask(get("/a"))) == 200); });
  CHECK(spent < Milliseconds(1000));
  silent.front().read_to_end(Milliseconds(2000));
  CHECK(silent.front().closed());
}

TEST_CASE("clients that never take their answers cannot fill the table either") {
  ServerLimits limits;
  limits.connections = 6;
  limits.workers = 2;
  Running running(limits);
  std::list<RawClient> lazy;
  for (int i = 0; i < 20; ++i) {
    lazy.emplace_back(running.server.port(), 4096);
    lazy.back().send(get("/big"));
  }
  CHECK(status_of(running.ask(get("/a"))) == 200);
}

TEST_CASE("idle connections are closed, first ones sooner than kept ones") {
  Running running(short_limits());
  RawClient silent(running.server.port()), kept(running.server.port());
  kept.send(get("/a"));
  kept.read_answer();
  silent.read_to_end();
  CHECK(silent.closed());
  const auto spent = time_of([&] { kept.read_to_end(); });
  CHECK(kept.closed());
  CHECK(spent < Milliseconds(1500));
}

TEST_CASE("a client that does not take its answer is cut off and holds no worker") {
  ServerLimits limits = short_limits();
  limits.workers = 2;
  Running running(limits);
  std::list<RawClient> lazy;
  for (int i = 0; i < 6; ++i) {
    lazy.emplace_back(running.server.port(), 4096);
    lazy.back().send(get("/big"));
  }
  CHECK(status_of(running.ask(get("/a"))) == 200);
  // Nothing arrives at a client that does not read, not even the end: only time tells.
  std::this_thread::sleep_for(Milliseconds(1200));
  CHECK(lazy.front().read_to_end().size() < 8'000'000);
  CHECK(lazy.front().closed());
}

TEST_CASE("a large answer arrives whole at a client that reads it late") {
  Running running;
  RawClient client(running.server.port(), 65536);
  client.send(get("/big"));
  CHECK(body_of(client.read_answer()).size() == 8'000'000);
}

TEST_CASE("an exception of the handler becomes 500 without its message, which is told to the log") {
  Running running;
  for (const std::string path : {"/throw", "/throw-int"}) {
    const std::string answer = running.ask(get(path));
    CHECK(status_of(answer) == 500);
    CHECK(header_of(answer, "Content-Type") == "application/problem+json");
    CHECK(answer.find("secret") == std::string::npos);
    CHECK(answer.find("EXCEPTION") == std::string::npos);
  }
  CHECK(status_of(running.ask(get("/a"))) == 200);
  const std::scoped_lock lock(running.mutex);
  CHECK(running.told.find("secret of the house") != std::string::npos);
  CHECK(running.told.find("unknown type") != std::string::npos);
}

TEST_CASE("a port in use is an error, not shared") {
  Running running;
  const Listen same{"127.0.0.1", running.server.port(), false};
  const std::string expected = "127.0.0.1:" + std::to_string(running.server.port()) + " is in use";
  CHECK_THROWS_WITH_AS(HttpServer(same, nullptr, nullptr), expected.c_str(), ListenError);
}

TEST_CASE("an address that is none, or not ours, is an error that says so") {
  CHECK_THROWS_AS(HttpServer({"harrow", 0, false}, nullptr, nullptr), ListenError);
  CHECK_THROWS_AS(HttpServer({"192.0.2.1", 0, false}, nullptr, nullptr), ListenError);
}

TEST_CASE("a stopped server's port is free again at once") {
  int port = 0;
  {
    Running running;
    port = running.server.port();
    CHECK(status_of(running.ask(get("/a"))) == 200);
  }
  CHECK_NOTHROW(HttpServer({"127.0.0.1", port, false}, nullptr, nullptr));
}

TEST_CASE("stop is quick with clients connected, and finishes what is being answered") {
  ServerLimits limits;  // the real ones: seconds
  Running running(limits);
  std::list<RawClient> clients;
  for (int i = 0; i < 30; ++i) clients.emplace_back(running.server.port());
  clients.front().send("GET / HTTP/1.1\r\nHost: h\r\n");
  RawClient asking(running.server.port());
  asking.send(get("/slow"));
  while (running.requests == 0) std::this_thread::yield();
  CHECK(time_of([&] { running.server.stop(); }) < Milliseconds(500));
  CHECK(status_of(asking.read_answer()) == 200);
  CHECK(running.server.stopping());
}

TEST_CASE("stop before start and a second stop do no harm") {
  HttpServer server({"127.0.0.1", 0, false}, nullptr, nullptr);
  server.stop();
  server.stop();
  CHECK(server.port() > 0);
}

TEST_CASE("the number of requests of one connection is bounded") {
  ServerLimits limits;
  limits.requests_per_connection = 3;
  Running running(limits);
  RawClient client(running.server.port());
  client.send(get("/1") + get("/2") + get("/3"));
  const std::string all = client.read_to_end();
  CHECK(count_of(all, "HTTP/1.1 200") == 3);
  CHECK(count_of(all, "Connection: close") == 1);
  CHECK(client.closed());
}
