#pragma once
// Where the service can be asked.
#include <string>

namespace agreed {

/// "http://127.0.0.1:7480"; an address that stands for all of this machine's becomes the loopback one.
[[nodiscard]] std::string listen_url(const std::string& address, int port);

}  // namespace agreed
