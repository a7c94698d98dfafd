#pragma once
// The talk over one connection: bytes in, gate, answer, bytes out. Never waits.
#include "daemon/http/connection.hpp"
#include "daemon/http/responder.hpp"
#include "daemon/http/server.hpp"

namespace agreed {

/// What a connection waits for next.
enum class NextStep { read, write, linger, close };

/// Goes on with `connection`, whose socket is ready for what its last step waited for (`was`), as far as it
/// goes. `last_answer`: close after the next answer.
[[nodiscard]] NextStep go_on(Connection& connection, ConnectionPhase was, Responder& responder,
                             const ServerLimits& limits, bool last_answer);

}  // namespace agreed
