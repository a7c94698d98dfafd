#include "daemon/http/exchange.hpp"

#include <array>
#include <cerrno>
#include <string_view>

#include <sys/socket.h>

namespace agreed {
namespace {

constexpr std::size_t kReadAtOnce = 16'384;
constexpr std::size_t kMostThrownAway = 1U << 20U;
constexpr std::size_t kKeptBuffer = 65'536;
constexpr std::string_view kContinue = "HTTP/1.1 100 Continue\r\n\r\n";

enum class Received { some, nothing_yet, end };

Received receive(Connection& connection) {
  std::array<char, kReadAtOnce> bytes;  // NOLINT: filled by recv
  while (true) {
    const ssize_t count = ::recv(connection.socket, bytes.data(), bytes.size(), MSG_DONTWAIT);
    if (count > 0) {
      if (connection.in.empty() && connection.answered > 0)
        connection.began = std::chrono::steady_clock::now();
      connection.in.append(bytes.data(), static_cast<std::size_t>(count));
      return Received::some;
    }
    if (count == 0) return Received::end;
    if (errno == EINTR) continue;
    return errno == EAGAIN || errno == EWOULDBLOCK ? Received::nothing_yet : Received::end;
  }
}

enum class Sent { all, some, failed };

Sent send_out(Connection& connection) {
  while (connection.sent < connection.out.size()) {
    const ssize_t count = ::send(connection.socket, connection.out.data() + connection.sent,
                                 connection.out.size() - connection.sent, MSG_DONTWAIT | MSG_NOSIGNAL);
    if (count >= 0) {
      connection.sent += static_cast<std::size_t>(count);
    } else if (errno != EINTR) {
      return errno == EAGAIN || errno == EWOULDBLOCK ? Sent::some : Sent::failed;
    }
  }
  connection.sent = 0;
  connection.out.clear();
  if (connection.out.capacity() > kKeptBuffer) connection.out.shrink_to_fit();
  return Sent::all;
}

void refuse(Connection& connection, const Gated& gated, Responder& responder) {
  connection.out = responder.refuse(gated);
  connection.refused = connection.close_after = true;
}

/// Answers the request at the beginning of `in` if it is whole (or to be refused); false: more must come.
bool answer_next(Connection& connection, Responder& responder, const ServerLimits& limits, bool last_answer) {
  if (connection.in.empty()) return false;
  const Gated gated = look_at(connection.in, limits.gate);
  if (gated.refusal.status != 0) {
    refuse(connection, gated, responder);
    return true;
  }
  if (!gated.head_complete) return false;
  const std::size_t length = gated.head_length + gated.body_length;
  if (connection.in.size() < length) {
    if (gated.expects_100 && !connection.continued) {
      connection.out = kContinue;
      connection.continued = true;
      return true;
    }
    return false;
  }
  ++connection.answered;
  connection.close_after =
      gated.close || last_answer || connection.answered >= limits.requests_per_connection;
  connection.out =
      responder.respond(gated, std::string_view(connection.in).substr(gated.head_length, gated.body_length),
                        connection.close_after);
  connection.in.erase(0, length);
  connection.continued = false;
  connection.began = std::chrono::steady_clock::now();
  return true;
}

/// Answers and sends until the client has to do something.
NextStep answer_all(Connection& connection, Responder& responder, const ServerLimits& limits,
                    bool last_answer) {
  while (true) {
    switch (send_out(connection)) {
      case Sent::failed:
        return NextStep::close;
      case Sent::some:
        return NextStep::write;
      case Sent::all:
        break;
    }
    // A close with bytes unread would reset the connection and could destroy the answer on its way.
    if (connection.close_after)
      return connection.refused || !connection.in.empty() ? NextStep::linger : NextStep::close;
    if (!answer_next(connection, responder, limits, last_answer)) return NextStep::read;
    connection.write_began = std::chrono::steady_clock::now();
  }
}

NextStep throw_away(Connection& connection) {
  std::array<char, kReadAtOnce> bytes;  // NOLINT: filled by recv, never looked at
  const ssize_t count = ::recv(connection.socket, bytes.data(), bytes.size(), MSG_DONTWAIT);
  if (count < 0) return errno == EAGAIN || errno == EINTR ? NextStep::linger : NextStep::close;
  connection.thrown_away += static_cast<std::size_t>(count);
  return count == 0 || connection.thrown_away > kMostThrownAway ? NextStep::close : NextStep::linger;
}

}  // namespace

NextStep go_on(Connection& connection, ConnectionPhase was, Responder& responder, const ServerLimits& limits,
               bool last_answer) {
  if (was == ConnectionPhase::lingering) return throw_away(connection);
  if (was == ConnectionPhase::writing)
    return connection.expired ? NextStep::close : answer_all(connection, responder, limits, last_answer);
  switch (receive(connection)) {
    case Received::nothing_yet:
      return NextStep::read;
    case Received::some:
      return answer_all(connection, responder, limits, last_answer);
    case Received::end:
      break;
  }
  if (!connection.expired || connection.in.empty()) return NextStep::close;
  Gated late;
  late.refusal = {408, "The request did not come whole in time."};
  refuse(connection, late, responder);
  return answer_all(connection, responder, limits, true);
}

}  // namespace agreed
