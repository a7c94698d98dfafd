#include "daemon/http/connection.hpp"

#include <cerrno>
#include <system_error>

#include <sys/socket.h>
#include <sys/timerfd.h>
#include <unistd.h>

namespace agreed {
namespace {

constexpr long kTickNanoseconds = 100'000'000;

}  // namespace

ConnectionTable::ConnectionTable() : timer_(::timerfd_create(CLOCK_MONOTONIC, TFD_NONBLOCK | TFD_CLOEXEC)) {
  if (timer_ < 0) throw std::system_error(errno, std::generic_category(), "timer for HTTP connections");
}

ConnectionTable::~ConnectionTable() {
  for (const auto& [connection, owner] : connections_) ::close(connection->socket);
  ::close(timer_);
}

Connection* ConnectionTable::add(int socket, std::size_t most) {
  auto fresh = std::make_unique<Connection>(socket);
  const std::scoped_lock lock(mutex_);
  if (connections_.size() >= most && !shut_longest_waiting_locked()) return nullptr;
  Connection* added = fresh.get();
  connections_.emplace(added, std::move(fresh));
  if (!ticking_) set_timer_locked(true);
  return added;
}

std::size_t ConnectionTable::size() {
  const std::scoped_lock lock(mutex_);
  return connections_.size();
}

void ConnectionTable::remove(Connection& connection) {
  const std::scoped_lock lock(mutex_);
  // Closed under the lock: a shutdown meant for it cannot hit another connection that got the same number.
  ::close(connection.socket);
  connections_.erase(&connection);
}

void ConnectionTable::shut_longest_waiting() {
  const std::scoped_lock lock(mutex_);
  shut_longest_waiting_locked();
}

bool ConnectionTable::shut_longest_waiting_locked() {
  Connection* longest = nullptr;
  for (const auto& [connection, owner] : connections_)
    if (connection->phase != ConnectionPhase::busy && !connection->expired &&
        (!longest || connection->since < longest->since))
      longest = connection;
  if (!longest) return false;
  longest->expired = true;
  ::shutdown(longest->socket, SHUT_RDWR);
  return true;
}

void ConnectionTable::tick(MonotonicTime now, bool keep_ticking) {
  std::uint64_t ticks = 0;
  [[maybe_unused]] const auto read = ::read(timer_, &ticks, sizeof ticks);
  const std::scoped_lock lock(mutex_);
  for (const auto& [connection, owner] : connections_) {
    const ConnectionPhase phase = connection->phase;
    if (phase == ConnectionPhase::busy || connection->deadline > now.time_since_epoch().count()) continue;
    connection->expired = true;
    // Half a request still gets an answer (408), so only its reading side is shut.
    ::shutdown(connection->socket, phase == ConnectionPhase::partial ? SHUT_RD : SHUT_RDWR);
  }
  if (connections_.empty() && !keep_ticking) set_timer_locked(false);
}

void ConnectionTable::start_ticking() {
  const std::scoped_lock lock(mutex_);
  if (!ticking_) set_timer_locked(true);
}

void ConnectionTable::set_timer_locked(bool ticking) {
  const timespec period{0, ticking ? kTickNanoseconds : 0};
  const itimerspec setting{period, period};
  ::timerfd_settime(timer_, 0, &setting, nullptr);
  ticking_ = ticking;
}

}  // namespace agreed
