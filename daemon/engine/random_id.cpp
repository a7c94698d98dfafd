#include "daemon/engine/random_id.hpp"

#include <array>
#include <stdexcept>

#include <openssl/rand.h>

#include "daemon/engine/sha256.hpp"

namespace agreed {

std::string random_message_id() {
  std::array<unsigned char, 16> bytes{};
  if (RAND_bytes(bytes.data(), static_cast<int>(bytes.size())) != 1)
    throw std::runtime_error("the system gives no random numbers");
  return "msg_" + to_hex(bytes);
}

}  // namespace agreed
