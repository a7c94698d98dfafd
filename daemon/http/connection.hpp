#pragma once
// One client's connection, and the table of all of them with their deadlines.
#include <atomic>
#include <chrono>
#include <cstddef>
#include <cstdint>
#include <memory>
#include <mutex>
#include <string>
#include <unordered_map>

namespace agreed {

/// Monotonic time: waits and deadlines only.
using MonotonicTime = std::chrono::steady_clock::time_point;

enum class ConnectionPhase : std::uint8_t {
  busy,       ///< a worker has it
  idle,       ///< waits for the first byte of a request
  partial,    ///< waits for the rest of one
  writing,    ///< waits until the client takes more of the answer
  lingering,  ///< answered and half closed; what still comes is thrown away, so that the answer arrives
};

/// Owned by one worker at a time (one-shot events see to that); others touch the atomics only.
struct Connection {
  explicit Connection(int of) : socket(of) {}

  const int socket;
  std::mutex handover;   ///< held while a worker gives it to the event queue, and when the next one takes it
  std::string in;        ///< came, not yet answered
  std::string out;       ///< answer on its way
  std::size_t sent = 0;  ///< of `out`
  std::size_t thrown_away = 0;  ///< while lingering
  int answered = 0;
  bool close_after = false;  ///< `out` is the last answer
  bool refused = false;      ///< `in` cannot be read further
  bool continued = false;    ///< 100 Continue is sent for the present request
  MonotonicTime began{};     ///< when the present request's first byte came (the first one: the connection)
  MonotonicTime write_began{};

  std::atomic<ConnectionPhase> phase{ConnectionPhase::busy};
  std::atomic<MonotonicTime::rep> since{0};     ///< in its phase, for choosing the longest waiting
  std::atomic<MonotonicTime::rep> deadline{0};  ///< of its phase
  std::atomic<bool> expired{false};
};

/// Thread-safe. A timer of its own ticks while there is a connection and only then, so an idle service
/// sleeps.
class ConnectionTable {
 public:
  /// Throws std::system_error when there is no timer to be had.
  ConnectionTable();
  ~ConnectionTable();
  ConnectionTable(const ConnectionTable&) = delete;
  ConnectionTable& operator=(const ConnectionTable&) = delete;

  /// Readable at each tick.
  [[nodiscard]] int timer() const { return timer_; }

  /// Takes over `socket`. With `most` connections in the table the one that waits longest for its client is
  /// shut down (its worker will remove it); if none waits, nothing is added and the socket stays the
  /// caller's.
  [[nodiscard]] Connection* add(int socket, std::size_t most);

  [[nodiscard]] std::size_t size();

  /// Closes and forgets it.
  void remove(Connection& connection);

  /// Shuts down the one that waits longest for its client.
  void shut_longest_waiting();

  /// To be called at each tick: shuts down whatever is past its deadline (its worker then sees the end of
  /// its input), and stops ticking when the table is empty unless `keep_ticking`.
  void tick(MonotonicTime now, bool keep_ticking);

  /// Makes the timer tick although there may be no connection.
  void start_ticking();

 private:
  bool shut_longest_waiting_locked();
  void set_timer_locked(bool ticking);

  std::mutex mutex_;
  std::unordered_map<Connection*, std::unique_ptr<Connection>> connections_;
  int timer_ = -1;
  bool ticking_ = false;
};

}  // namespace agreed
