#pragma once
// Reloads in a thread of its own, so that a signal to end is heard meanwhile.
#include <condition_variable>
#include <functional>
#include <mutex>
#include <optional>
#include <stop_token>
#include <string>
#include <thread>

namespace agreed {

class Reloader {
 public:
  using Reload = std::function<void(const std::stop_token& stop)>;

  /// What is called after a reload, in the thread: `over` when it came to its end, `failed` when failure()
  /// says why not.
  struct Then {
    std::function<void()> over, failed;
  };

  /// `reload` is called in the thread.
  Reloader(Reload reload, Then then);
  /// Ends; waits for a reload to give up.
  ~Reloader() { stop(); }
  Reloader(const Reloader&) = delete;
  Reloader& operator=(const Reloader&) = delete;

  /// Asks for a reload. One that is asked for while another is made is made after it: the file may have
  /// changed since that one read it.
  void ask();
  void stop() noexcept;
  /// Why a reload failed for good; none is made after that.
  [[nodiscard]] std::optional<std::string> failure() const;

 private:
  void run(const std::stop_token& stop);

  const Reload reload_;
  const Then then_;
  mutable std::mutex mutex_;
  std::condition_variable_any asked_for_;
  bool asked_ = false;
  std::optional<std::string> failure_;
  std::jthread thread_;  // last: it uses all of the above
};

}  // namespace agreed
