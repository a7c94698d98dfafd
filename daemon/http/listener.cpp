#include "daemon/http/listener.hpp"

#include <cerrno>
#include <memory>
#include <system_error>

#include <netdb.h>
#include <netinet/in.h>
#include <sys/socket.h>
#include <unistd.h>

namespace agreed {
namespace {

constexpr int kBacklog = 511;

using Addresses = std::unique_ptr<addrinfo, decltype(&::freeaddrinfo)>;

std::string place_of(const std::string& address, int port) {
  const bool is_v6 = address.find(':') != std::string::npos;
  return (is_v6 ? "[" + address + "]" : address) + ":" + std::to_string(port);
}

Addresses resolve(const std::string& address, int port) {
  addrinfo hints{};
  hints.ai_family = AF_UNSPEC;
  hints.ai_socktype = SOCK_STREAM;
  hints.ai_flags = AI_PASSIVE | AI_NUMERICSERV | (address == "localhost" ? 0 : AI_NUMERICHOST);
  addrinfo* found = nullptr;
  if (::getaddrinfo(address.c_str(), std::to_string(port).c_str(), &hints, &found) != 0 || !found)
    throw ListenError(place_of(address, port) +
                      " is not an address; expected a number like 127.0.0.1 or ::1");
  return {found, &::freeaddrinfo};
}

std::string why(int error) {
  switch (error) {
    case EADDRINUSE:
      return " is in use";
    case EACCES:
      return " may not be listened on: ports below 1024 need a privilege";
    case EADDRNOTAVAIL:
      return " cannot be listened on: this machine does not have the address";
    default:
      return " cannot be listened on: " + std::generic_category().message(error);
  }
}

int port_of(int socket) {
  sockaddr_storage address{};
  socklen_t length = sizeof address;
  if (::getsockname(socket, reinterpret_cast<sockaddr*>(&address), &length) != 0) return 0;
  if (address.ss_family == AF_INET6) return ntohs(reinterpret_cast<const sockaddr_in6&>(address).sin6_port);
  return ntohs(reinterpret_cast<const sockaddr_in&>(address).sin_port);
}

}  // namespace

Listener::Listener(const std::string& address, int port) {
  const Addresses found = resolve(address, port);
  socket_ = ::socket(found->ai_family, SOCK_STREAM | SOCK_NONBLOCK | SOCK_CLOEXEC, 0);
  const int on = 1;
  // SO_REUSEADDR lets a restarted service have its port back at once; a port that someone listens on stays
  // refused.
  const bool listening =
      socket_ >= 0 && ::setsockopt(socket_, SOL_SOCKET, SO_REUSEADDR, &on, sizeof on) == 0 &&
      ::bind(socket_, found->ai_addr, found->ai_addrlen) == 0 && ::listen(socket_, kBacklog) == 0;
  if (!listening) {
    const int error = errno;
    if (socket_ >= 0) ::close(socket_);
    throw ListenError(place_of(address, port) + why(error));
  }
  port_ = port_of(socket_);
}

Listener::~Listener() {
  ::close(socket_);
}

}  // namespace agreed
