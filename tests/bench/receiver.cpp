// A webhook endpoint as light as one can be, in a process of its own: takes one call after the other, and
// writes for each the steady clock's nanoseconds at which its body was there, a line each. bench_receiver
// PORT; ends when its standard input does.
#include <algorithm>
#include <cstdio>
#include <cstdlib>
#include <string>
#include <string_view>

#include <arpa/inet.h>
#include <netinet/in.h>
#include <poll.h>
#include <strings.h>
#include <sys/socket.h>
#include <time.h>
#include <unistd.h>

namespace {

int listening(int port) {
  const int server = ::socket(AF_INET, SOCK_STREAM, 0);
  const int yes = 1;
  ::setsockopt(server, SOL_SOCKET, SO_REUSEADDR, &yes, sizeof yes);
  sockaddr_in address{};
  address.sin_family = AF_INET;
  address.sin_port = htons(static_cast<std::uint16_t>(port));
  address.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
  if (::bind(server, reinterpret_cast<const sockaddr*>(&address), sizeof address) != 0 ||
      ::listen(server, 16) != 0)
    return -1;
  return server;
}

/// How long a call is, head and body; 0 while its head is not whole.
std::size_t length_of(std::string_view call) {
  const std::size_t head = call.find("\r\n\r\n");
  if (head == std::string_view::npos) return 0;
  constexpr std::string_view kLength = "\r\nContent-Length:";
  std::size_t body = 0;
  for (std::size_t at = 0; at < head; at = call.find("\r\n", at + 1))
    if (::strncasecmp(call.data() + at, kLength.data(), kLength.size()) == 0)
      body = std::strtoul(call.data() + at + kLength.size(), nullptr, 10);
  return head + 4 + body;
}

bool read_call(int connection) {
  std::string call;
  char bytes[65536];
  while (true) {
    const ssize_t count = ::read(connection, bytes, sizeof bytes);
    if (count <= 0) return false;
    call.append(bytes, static_cast<std::size_t>(count));
    const std::size_t length = length_of(call);
    if (length > 0 && call.size() >= length) return true;
  }
}

void take_call(int server) {
  const int connection = ::accept(server, nullptr, nullptr);
  if (connection < 0) return;
  if (read_call(connection)) {
    timespec now{};
    ::clock_gettime(CLOCK_MONOTONIC, &now);
    constexpr std::string_view kAnswer = "HTTP/1.1 204 No Content\r\nConnection: close\r\n\r\n";
    (void)!::write(connection, kAnswer.data(), kAnswer.size());
    std::printf("%lld\n", now.tv_sec * 1'000'000'000LL + now.tv_nsec);
    std::fflush(stdout);
  }
  ::close(connection);
}

}  // namespace

int main(int argc, char** argv) {
  if (argc != 2) return 2;
  const int server = listening(std::atoi(argv[1]));
  if (server < 0) return 3;
  std::puts("ready");
  std::fflush(stdout);
  pollfd watched[2] = {{server, POLLIN, 0}, {STDIN_FILENO, POLLIN, 0}};
  while (::poll(watched, 2, -1) > 0 && watched[1].revents == 0)
    if (watched[0].revents != 0) take_call(server);
}
