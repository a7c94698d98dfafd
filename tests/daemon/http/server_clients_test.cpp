// Clients that are slow, silent or many, handlers that throw, ports in use, and stopping: over a bare socket.
#include <list>

#include <doctest/doctest.h>

#include "tests/daemon/http/running_server.hpp"

using namespace agreed;
using namespace agreed::test;

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
