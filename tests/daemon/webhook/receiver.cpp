#include "tests/daemon/webhook/receiver.hpp"

#include <algorithm>
#include <cctype>
#include <chrono>
#include <stdexcept>

#include <arpa/inet.h>
#include <netinet/in.h>
#include <poll.h>
#include <sys/socket.h>
#include <unistd.h>

namespace agreed::test {
namespace {

std::string lower(std::string text) {
  std::transform(text.begin(), text.end(), text.begin(),
                 [](unsigned char c) { return static_cast<char>(std::tolower(c)); });
  return text;
}

}  // namespace

std::string Received::header(const std::string& lower_case_name) const {
  const auto at = lower(head).find("\r\n" + lower_case_name + ": ");
  if (at == std::string::npos) return "";
  const auto value = at + 2 + lower_case_name.size() + 2;
  return head.substr(value, head.find("\r\n", value) - value);
}

Reply answer(int status, const std::string& header_lines) {
  return [=](const auto& send) {
    send("HTTP/1.1 " + std::to_string(status) + " X\r\n" + header_lines +
         (status == 204 ? "\r\n" : "Content-Length: 2\r\n\r\nok"));
  };
}

Reply hang() {
  return [](const auto& send) {
    while (send("")) std::this_thread::sleep_for(std::chrono::milliseconds(5));
  };
}

Receiver::Receiver(std::vector<Reply> script, int port) : script_(script.begin(), script.end()) {
  listener_ = ::socket(AF_INET, SOCK_STREAM | SOCK_CLOEXEC, 0);
  const int yes = 1;
  ::setsockopt(listener_, SOL_SOCKET, SO_REUSEADDR, &yes, sizeof yes);
  sockaddr_in address{};
  address.sin_family = AF_INET;
  address.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
  address.sin_port = htons(static_cast<std::uint16_t>(port));
  socklen_t size = sizeof address;
  if (::bind(listener_, reinterpret_cast<sockaddr*>(&address), size) != 0 || ::listen(listener_, 64) != 0 ||
      ::getsockname(listener_, reinterpret_cast<sockaddr*>(&address), &size) != 0)
    throw std::runtime_error("receiver: no port");
  port_ = ntohs(address.sin_port);
  thread_ = std::thread([this] { serve(); });
}

Receiver::~Receiver() {
  ending_ = true;
  thread_.join();
  for (auto& connection : connections_) connection.join();
  ::close(listener_);
}

std::string Receiver::url(const std::string& path) const {
  return "http://127.0.0.1:" + std::to_string(port_) + path;
}

std::vector<Received> Receiver::wait_for(std::size_t count) {
  std::unique_lock lock(mutex_);
  changed_.wait_for(lock, std::chrono::seconds(10), [&] { return received_.size() >= count; });
  return received_;
}

void Receiver::serve() {
  while (!ending_) {
    pollfd ready{listener_, POLLIN, 0};
    if (::poll(&ready, 1, 20) <= 0) continue;
    const int socket = ::accept4(listener_, nullptr, nullptr, SOCK_CLOEXEC);
    if (socket >= 0) connections_.emplace_back([this, socket] { handle(socket); });
  }
}

void Receiver::handle(int socket) {
  std::string text;
  std::size_t head_end = std::string::npos, body_size = 0;
  while (!ending_ && (head_end == std::string::npos || text.size() < head_end + 4 + body_size)) {
    pollfd ready{socket, POLLIN, 0};
    if (::poll(&ready, 1, 20) <= 0) continue;
    char buffer[4096];
    const auto count = ::recv(socket, buffer, sizeof buffer, 0);
    if (count <= 0) break;
    text.append(buffer, static_cast<std::size_t>(count));
    head_end = text.find("\r\n\r\n");
    if (head_end == std::string::npos) continue;
    const std::string length = Received{text.substr(0, head_end + 2), ""}.header("content-length");
    body_size = length.empty() ? 0 : std::stoul(length);
  }
  if (head_end != std::string::npos) {
    Reply reply;
    {
      const std::lock_guard lock(mutex_);
      received_.push_back({text.substr(0, head_end + 2), text.substr(head_end + 4)});
      reply = script_.front();
      if (script_.size() > 1) script_.pop_front();
      changed_.notify_all();
    }
    reply([&](const std::string& bytes) {
      char peeked = 0;
      if (ending_ || ::recv(socket, &peeked, 1, MSG_PEEK | MSG_DONTWAIT) == 0) return false;
      return bytes.empty() || ::send(socket, bytes.data(), bytes.size(), MSG_NOSIGNAL) > 0;
    });
  }
  ::close(socket);
}

}  // namespace agreed::test
