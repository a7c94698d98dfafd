#include "daemon/http/server.hpp"

#include <atomic>
#include <cerrno>
#include <system_error>
#include <thread>
#include <vector>

#include <netinet/in.h>
#include <netinet/tcp.h>
#include <sys/epoll.h>
#include <sys/eventfd.h>
#include <sys/socket.h>
#include <unistd.h>

#include "daemon/descriptor.hpp"
#include "daemon/http/connection.hpp"
#include "daemon/http/exchange.hpp"
#include "daemon/thread_name.hpp"

namespace agreed {
namespace {

Descriptor checked(int descriptor, const char* what) {
  if (descriptor < 0) throw std::system_error(errno, std::generic_category(), what);
  return Descriptor(descriptor);
}

// Marks of the events that are not a connection's; no object lives at these addresses.
constexpr std::uint64_t kStop = 0, kListener = 1, kTimer = 2;

}  // namespace

class HttpServer::Workers {
 public:
  Workers(const Listen& listen, HttpHandler handler, std::function<void(const std::string&)> tell,
          const ServerLimits& limits)
      : listener_(listen.address, listen.port),
        handler_(std::move(handler)),
        tell_(std::move(tell)),
        limits_(limits),
        queue_(checked(::epoll_create1(EPOLL_CLOEXEC), "event queue of the HTTP server")),
        stop_(checked(::eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK), "stop mark of the HTTP server")) {}
  ~Workers() { stop(); }
  Workers(const Workers&) = delete;
  Workers& operator=(const Workers&) = delete;

  void start() {
    watch(EPOLL_CTL_ADD, stop_.get(), EPOLLIN, kStop);
    watch(EPOLL_CTL_ADD, listener_.socket(), EPOLLIN | EPOLLONESHOT, kListener);
    watch(EPOLL_CTL_ADD, connections_.timer(), EPOLLIN | EPOLLONESHOT, kTimer);
    for (int i = 0; i < limits_.workers; ++i) threads_.emplace_back([this] { work(); });
  }

  void stop() noexcept {
    stopping_ = true;
    const std::uint64_t one = 1;
    [[maybe_unused]] const auto written = ::write(stop_.get(), &one, sizeof one);
    for (std::thread& thread : threads_)
      if (thread.joinable()) thread.join();
  }

  [[nodiscard]] bool stopping() const noexcept { return stopping_; }
  [[nodiscard]] int port() const { return listener_.port(); }

 private:
  void work() noexcept {
    name_this_thread("http");
    try {
      Responder responder(handler_, tell_, std::chrono::floor<std::chrono::seconds>(limits_.idle),
                          limits_.requests_per_connection);
      while (!stopping_) {
        epoll_event event{};
        if (::epoll_wait(queue_.get(), &event, 1, -1) == 1) take(event, responder);
      }
    } catch (...) {
      tell_("an HTTP worker could not be made: there is no memory for it");
    }
  }

  /// An exception here (memory) costs the one connection, never the worker.
  void take(const epoll_event& event, Responder& responder) {
    switch (event.data.u64) {
      case kStop:
        return;
      case kListener:
        accept_waiting();
        return;
      case kTimer:
        tick();
        return;
      default:
        break;
    }
    auto& connection = *static_cast<Connection*>(event.data.ptr);
    try {
      wait_for(connection, go_on(connection, taken(connection), responder, limits_, stopping_));
    } catch (const std::exception&) {
      connections_.remove(connection);
    }
  }

  void accept_waiting() noexcept {
    for (int i = 0; i < 64; ++i) {
      const int socket = ::accept4(listener_.socket(), nullptr, nullptr, SOCK_NONBLOCK | SOCK_CLOEXEC);
      if (socket >= 0) {
        welcome(socket);
        // One had to go for it: let that one be cleared away before the next comes in.
        if (connections_.size() >= limits_.connections) break;
      } else if (errno == EAGAIN || errno == EWOULDBLOCK) {
        break;
      } else if (errno == EMFILE || errno == ENFILE || errno == ENOBUFS || errno == ENOMEM) {
        // Nothing can be accepted now, and the listener stays readable: make room and look again at the tick.
        connections_.shut_longest_waiting();
        paused_ = true;
        connections_.start_ticking();
        return;
      }  // anything else is the fault of the one client that has gone again
    }
    watch(EPOLL_CTL_MOD, listener_.socket(), EPOLLIN | EPOLLONESHOT, kListener);
  }

  void welcome(int socket) noexcept {
    const int on = 1;
    ::setsockopt(socket, IPPROTO_TCP, TCP_NODELAY, &on, sizeof on);
    Connection* connection = nullptr;
    try {
      connection = connections_.add(socket, limits_.connections);
    } catch (const std::exception&) {  // no memory: as when there is no place
    }
    if (!connection) {
      ::close(socket);
      return;
    }
    connection->began = std::chrono::steady_clock::now();
    hand_over(*connection, ConnectionPhase::idle, connection->began, connection->began + limits_.request,
              EPOLL_CTL_ADD);
  }

  void tick() noexcept {
    const bool was_paused = paused_.exchange(false);
    connections_.tick(std::chrono::steady_clock::now(), was_paused);
    if (was_paused) watch(EPOLL_CTL_MOD, listener_.socket(), EPOLLIN | EPOLLONESHOT, kListener);
    watch(EPOLL_CTL_MOD, connections_.timer(), EPOLLIN | EPOLLONESHOT, kTimer);
  }

  static ConnectionPhase taken(Connection& connection) {
    const std::scoped_lock lock(connection.handover);
    return connection.phase.exchange(ConnectionPhase::busy);
  }

  void wait_for(Connection& connection, NextStep step) {
    const auto now = std::chrono::steady_clock::now();
    switch (step) {
      case NextStep::close:
        connections_.remove(connection);
        return;
      case NextStep::write:
        hand_over(connection, ConnectionPhase::writing, now, connection.write_began + limits_.write);
        return;
      case NextStep::linger:
        if (connection.thrown_away == 0) {
          ::shutdown(connection.socket, SHUT_WR);
          connection.write_began = now;
        }
        hand_over(connection, ConnectionPhase::lingering, now, connection.write_began + limits_.linger);
        return;
      case NextStep::read:
        break;
    }
    const bool kept = connection.in.empty() && connection.answered > 0;
    hand_over(connection, connection.in.empty() ? ConnectionPhase::idle : ConnectionPhase::partial,
              connection.began, connection.began + (kept ? limits_.idle : limits_.request));
  }

  /// Gives the connection to the event queue: after this it is another worker's.
  void hand_over(Connection& connection, ConnectionPhase phase, MonotonicTime since, MonotonicTime deadline,
                 int operation = EPOLL_CTL_MOD) noexcept {
    epoll_event event{};
    event.events = (phase == ConnectionPhase::writing ? EPOLLOUT : EPOLLIN) | EPOLLONESHOT;
    event.data.ptr = &connection;
    bool given = false;
    {
      const std::scoped_lock lock(connection.handover);
      connection.since = since.time_since_epoch().count();
      connection.deadline = deadline.time_since_epoch().count();
      connection.phase = phase;
      given = ::epoll_ctl(queue_.get(), operation, connection.socket, &event) == 0;
    }
    if (!given) connections_.remove(connection);
  }

  void watch(int operation, int descriptor, std::uint32_t events, std::uint64_t mark) noexcept {
    epoll_event event{};
    event.events = events;
    event.data.u64 = mark;
    ::epoll_ctl(queue_.get(), operation, descriptor, &event);
  }

  Listener listener_;
  const HttpHandler handler_;
  const std::function<void(const std::string&)> tell_;
  const ServerLimits limits_;
  ConnectionTable connections_;
  Descriptor queue_, stop_;
  std::atomic<bool> stopping_{false}, paused_{false};
  std::vector<std::thread> threads_;
};

HttpServer::HttpServer(const Listen& listen, HttpHandler handler,
                       std::function<void(const std::string&)> tell, ServerLimits limits)
    : workers_(std::make_unique<Workers>(listen, std::move(handler), std::move(tell), limits)) {}
HttpServer::~HttpServer() = default;

void HttpServer::start() {
  workers_->start();
}
void HttpServer::stop() noexcept {
  workers_->stop();
}
bool HttpServer::stopping() const noexcept {
  return workers_->stopping();
}
int HttpServer::port() const {
  return workers_->port();
}

}  // namespace agreed
