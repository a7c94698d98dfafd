#pragma once
// The listening socket. Ours and not the library's, which shares a port between services (SO_REUSEPORT),
// hides why it cannot listen, and ends its accept loop at the first aborted connection.
#include <stdexcept>
#include <string>

namespace agreed {

/// The address cannot be listened on; what() begins with address:port and is for people.
class ListenError : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

class Listener {
 public:
  /// Listens on `address` (a number or localhost); port 0 picks a free one. Throws ListenError: "ADDRESS:PORT
  /// is in use", or what else stands in the way.
  Listener(const std::string& address, int port);
  ~Listener();
  Listener(const Listener&) = delete;
  Listener& operator=(const Listener&) = delete;

  [[nodiscard]] int port() const { return port_; }
  [[nodiscard]] int socket() const { return socket_; }

 private:
  int socket_ = -1;
  int port_ = 0;
};

}  // namespace agreed
