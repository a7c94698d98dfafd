#pragma once
// The HTTP server: a few workers share one event queue, so a connection has a worker only while its request
// is being answered. Slow, silent or broken clients cost a table entry, never a worker.
#include <chrono>
#include <functional>
#include <memory>
#include <string>

#include "config/config.hpp"
#include "daemon/http/gate.hpp"
#include "daemon/http/listener.hpp"
#include "daemon/http/message.hpp"

namespace agreed {

struct ServerLimits {
  GateLimits gate;
  std::chrono::milliseconds request{5'000};  ///< from a request's first byte to its last
  std::chrono::milliseconds idle{15'000};    ///< between two requests
  std::chrono::milliseconds write{30'000};   ///< for the client to take an answer
  std::chrono::milliseconds linger{1'000};   ///< after a refusal, for the answer to arrive
  std::size_t connections = 256;             ///< beyond, the one that waits longest for its client has to go
  int requests_per_connection = 10'000;
  int workers = 8;
};

class HttpServer {
 public:
  /// Listens from now on, answers from `start` on. Throws ListenError when the address cannot be had.
  /// `handler` is called by several threads at once; an exception of it makes a 500 without its message,
  /// which goes to `tell`.
  HttpServer(const Listen& listen, HttpHandler handler, std::function<void(const std::string&)> tell,
             ServerLimits limits = {});
  /// Stops.
  ~HttpServer();

  void start();
  /// Requests being answered are finished, everything else is cut off. Does nothing the second time.
  void stop() noexcept;
  [[nodiscard]] bool stopping() const noexcept;
  /// The port listened on, also when 0 was asked for.
  [[nodiscard]] int port() const;

 private:
  class Workers;
  std::unique_ptr<Workers> workers_;
};

}  // namespace agreed
