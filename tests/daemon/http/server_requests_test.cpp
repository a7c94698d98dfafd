// Requests that are wrong, doubtful or too large, over a bare socket: each weakness of the packaged HTTP
// library in reading them, shown closed.
#include <vector>

#include <doctest/doctest.h>

#include "tests/daemon/http/running_server.hpp"

using namespace agreed;
using namespace agreed::test;

TEST_CASE("an answer comes in one piece with the headers that protect it, and the connection is kept") {
  Running running;
  RawClient client(running.server.port());
  for (int i = 0; i < 3; ++i) {
    client.send(get("/a"));
    const std::string answer = client.read_answer();
    CHECK(status_of(answer) == 200);
    CHECK(body_of(answer) == "/a []");
    CHECK(header_of(answer, "Content-Security-Policy") ==
          "default-src 'self'; base-uri 'none'; form-action 'self'; frame-ancestors 'none'");
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
      {std::string("GET / HTTP/1.1\r\nHost: h\r\nA: b").append(1, '\0').append("c\r\n\r\n"), 400},
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

TEST_CASE("percent escapes in header values stay as they were sent") {
  Running running;
  const std::string answer = running.ask(get("/a", "Authorization: Bearer a%41%0d%0aSet-Cookie: b=c\r\n"));
  CHECK(body_of(answer) == "/a []Bearer a%41%0d%0aSet-Cookie: b=c");
}
