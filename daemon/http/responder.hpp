#pragma once
// Turns one request that passed the gate into the bytes of its answer, with the packaged HTTP library.
#include <chrono>
#include <functional>
#include <memory>
#include <string>
#include <string_view>

#include "daemon/http/gate.hpp"
#include "daemon/http/message.hpp"

namespace agreed {

/// Not thread-safe: every worker has its own.
class Responder {
 public:
  /// `tell` gets the message of an exception that left the handler; the client is not told it.
  /// A kept connection is told that it may wait `idle` for the next of its `requests` requests.
  Responder(HttpHandler handler, std::function<void(const std::string&)> tell, std::chrono::seconds idle,
            int requests);
  ~Responder();
  Responder(const Responder&) = delete;
  Responder& operator=(const Responder&) = delete;

  /// The whole answer, head and body. `close`: it says that the connection will be closed.
  [[nodiscard]] std::string respond(const Gated& request, std::string_view body, bool close);

  /// The answer to a request that did not pass; the connection is to be closed after it.
  [[nodiscard]] std::string refuse(const Gated& request);

 private:
  class Library;
  std::unique_ptr<Library> library_;
};

}  // namespace agreed
