#pragma once
// Whether a thread that works in a folder gets on: a folder on a dead network share holds up whoever touches
// it, so another thread must be able to tell.
#include <atomic>
#include <chrono>
#include <optional>

namespace agreed {

/// Written by one thread, read by any.
class Pulse {
 public:
  using Clock = std::chrono::steady_clock;

  /// About to touch the folder.
  void step() noexcept { since_ = Clock::now().time_since_epoch().count(); }
  /// Done with it: from now on the thread waits for something else.
  void rest() noexcept { since_ = kResting; }
  /// When the step that is not over began; nothing while the thread rests.
  [[nodiscard]] std::optional<Clock::time_point> stepping_since() const noexcept {
    const Clock::rep since = since_;
    if (since == kResting) return std::nullopt;
    return Clock::time_point(Clock::duration(since));
  }

 private:
  static constexpr Clock::rep kResting = Clock::time_point::min().time_since_epoch().count();
  std::atomic<Clock::rep> since_ = kResting;
};

}  // namespace agreed
