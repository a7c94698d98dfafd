#include "daemon/cli/listen_url.hpp"

namespace agreed {

std::string listen_url(const std::string& address, int port) {
  const bool any = address == "0.0.0.0" || address == "::";
  const bool six = address.find(':') != std::string::npos;
  const std::string host = any ? "127.0.0.1" : six ? '[' + address + ']' : address;
  return "http://" + host + ":" + std::to_string(port);
}

}  // namespace agreed
