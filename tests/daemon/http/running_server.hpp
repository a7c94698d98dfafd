#pragma once
// A server that shows what it was asked, for the tests of the server.
#include <atomic>
#include <mutex>
#include <stdexcept>
#include <string>
#include <thread>

#include "daemon/http/server.hpp"
#include "tests/daemon/http/raw_client.hpp"

namespace agreed::test {

/// For the tests of deadlines.
inline ServerLimits short_limits() {
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

inline std::string path_of(const std::string& segment) {
  return std::string(1, '/').append(segment);
}

inline std::string post(const std::string& headers, const std::string& body) {
  return "POST /p HTTP/1.1\r\nHost: h\r\n" + headers + "\r\n" + body;
}

inline std::chrono::milliseconds time_of(const std::function<void()>& what) {
  const auto begin = std::chrono::steady_clock::now();
  what();
  return std::chrono::duration_cast<Milliseconds>(std::chrono::steady_clock::now() - begin);
}

}  // namespace agreed::test
