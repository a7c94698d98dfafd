#pragma once
// A client made of a bare socket: it sends any bytes, right or wrong, and shows exactly what came back.
#include <chrono>
#include <cstring>
#include <stdexcept>
#include <string>
#include <string_view>

#include <arpa/inet.h>
#include <netinet/in.h>
#include <netinet/tcp.h>
#include <poll.h>
#include <sys/socket.h>
#include <unistd.h>

namespace agreed::test {

using Milliseconds = std::chrono::milliseconds;

class RawClient {
 public:
  /// `receive_buffer` 0: the system's.
  explicit RawClient(int port, int receive_buffer = 0)
      : socket_(::socket(AF_INET, SOCK_STREAM | SOCK_CLOEXEC, 0)) {
    sockaddr_in address{};
    address.sin_family = AF_INET;
    address.sin_port = htons(static_cast<std::uint16_t>(port));
    address.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
    const int on = 1;
    ::setsockopt(socket_, IPPROTO_TCP, TCP_NODELAY, &on, sizeof on);
    if (receive_buffer > 0)
      ::setsockopt(socket_, SOL_SOCKET, SO_RCVBUF, &receive_buffer, sizeof receive_buffer);
    if (::connect(socket_, reinterpret_cast<const sockaddr*>(&address), sizeof address) != 0)
      throw std::runtime_error(std::string("connect: ") + std::strerror(errno));
  }
  ~RawClient() { ::close(socket_); }
  RawClient(const RawClient&) = delete;
  RawClient& operator=(const RawClient&) = delete;

  /// False when the other side has closed or reset.
  bool send(std::string_view bytes) {
    while (!bytes.empty()) {
      const ssize_t count = ::send(socket_, bytes.data(), bytes.size(), MSG_NOSIGNAL);
      if (count <= 0) return false;
      bytes.remove_prefix(static_cast<std::size_t>(count));
    }
    return true;
  }

  void end_sending() { ::shutdown(socket_, SHUT_WR); }

  /// All that comes until the other side closes; `closed()` tells whether it did within `longest`.
  std::string read_to_end(Milliseconds longest = Milliseconds(10000)) {
    std::string bytes;
    const auto last = std::chrono::steady_clock::now() + longest;
    while (!closed_ && read_some(bytes, last)) {
    }
    return bytes;
  }

  /// One answer by its Content-Length (none for HEAD or 304, `head_only`); what comes after it is kept.
  std::string read_answer(bool head_only = false, Milliseconds longest = Milliseconds(10000)) {
    const auto last = std::chrono::steady_clock::now() + longest;
    while (true) {
      const auto end = kept_.find("\r\n\r\n");
      if (end != std::string::npos) {
        const std::size_t length = end + 4 + (head_only ? 0 : content_length(kept_.substr(0, end)));
        if (kept_.size() >= length) {
          std::string answer = kept_.substr(0, length);
          kept_.erase(0, length);
          return answer;
        }
      }
      if (closed_ || !read_some(kept_, last)) return kept_;
    }
  }

  [[nodiscard]] bool closed() const { return closed_; }

 private:
  static std::size_t content_length(const std::string& head) {
    const auto at = head.find("Content-Length: ");
    return at == std::string::npos ? 0 : std::stoul(head.substr(at + 16));
  }

  bool read_some(std::string& bytes, std::chrono::steady_clock::time_point last) {
    const auto left = std::chrono::duration_cast<Milliseconds>(last - std::chrono::steady_clock::now());
    pollfd waiting{socket_, POLLIN, 0};
    if (left.count() <= 0 || ::poll(&waiting, 1, static_cast<int>(left.count())) <= 0) return false;
    char buffer[16384];
    const ssize_t count = ::recv(socket_, buffer, sizeof buffer, 0);
    if (count <= 0) {
      closed_ = true;
      return false;
    }
    bytes.append(buffer, static_cast<std::size_t>(count));
    return true;
  }

  int socket_;
  std::string kept_;
  bool closed_ = false;
};

/// The status of an answer; 0 when there is none.
inline int status_of(const std::string& answer) {
  return answer.size() < 12 || answer.substr(0, 9) != "HTTP/1.1 " ? 0 : std::stoi(answer.substr(9, 3));
}

inline std::string body_of(const std::string& answer) {
  const auto end = answer.find("\r\n\r\n");
  return end == std::string::npos ? "" : answer.substr(end + 4);
}

/// The value of a header field; empty when it is not there.
inline std::string header_of(const std::string& answer, const std::string& name) {
  const std::string head = answer.substr(0, answer.find("\r\n\r\n") + 2);
  const auto at = head.find("\r\n" + name + ": ");
  if (at == std::string::npos) return {};
  const auto begin = at + name.size() + 4;
  return head.substr(begin, head.find("\r\n", begin) - begin);
}

/// "GET path" with a Host; `more` are further header lines, each with its CRLF.
inline std::string get(const std::string& path, const std::string& more = "") {
  return "GET " + path + " HTTP/1.1\r\nHost: 127.0.0.1\r\n" + more + "\r\n";
}

/// How often `word` stands in `text`.
inline int count_of(const std::string& text, const std::string& word) {
  int count = 0;
  for (auto at = text.find(word); at != std::string::npos; at = text.find(word, at + word.size())) ++count;
  return count;
}

}  // namespace agreed::test
