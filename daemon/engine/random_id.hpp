#pragma once
// Names nobody else uses.
#include <string>

namespace agreed {

/// "msg_" and 128 random bits in hex: the id of a message, the same over all tries.
[[nodiscard]] std::string random_message_id();

}  // namespace agreed
