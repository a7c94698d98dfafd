#pragma once
// A scripted receiver on 127.0.0.1: answers each connection with the next line of its script and keeps what
// it got. Plain sockets, so that it can misbehave.
#include <atomic>
#include <condition_variable>
#include <deque>
#include <functional>
#include <mutex>
#include <string>
#include <thread>
#include <vector>

namespace agreed::test {

struct Received {
  std::string head;  ///< request line and headers, as sent
  std::string body;
  [[nodiscard]] std::string header(const std::string& lower_case_name) const;
};

/// What to do with a connection once its request was read whole: sends what it likes by `send` (false: the
/// other side is gone or the receiver ends), then the connection is closed.
using Reply = std::function<void(const std::function<bool(const std::string&)>& send)>;

/// An answer with a status and, if given, further header lines ("Name: value\r\n").
Reply answer(int status, const std::string& header_lines = "");
/// Nothing, until the other side goes.
Reply hang();

class Receiver {
 public:
  /// Port 0: any free one. The last reply of the script is repeated for ever.
  explicit Receiver(std::vector<Reply> script, int port = 0);
  ~Receiver();
  Receiver(const Receiver&) = delete;
  Receiver& operator=(const Receiver&) = delete;

  [[nodiscard]] int port() const { return port_; }
  [[nodiscard]] std::string url(const std::string& path = "/hook") const;
  /// Waits, at most ten seconds, for that many requests, and gives all there are.
  [[nodiscard]] std::vector<Received> wait_for(std::size_t count);

 private:
  void serve();
  void handle(int socket);

  int listener_ = -1, port_ = 0;
  std::atomic<bool> ending_ = false;
  std::mutex mutex_;
  std::condition_variable changed_;
  std::deque<Reply> script_;
  std::vector<Received> received_;
  std::vector<std::thread> connections_;
  std::thread thread_;
};

}  // namespace agreed::test
