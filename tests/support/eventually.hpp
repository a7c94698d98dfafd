#pragma once
// Waiting for something that another thread does, with a deadline.
#include <chrono>
#include <thread>

namespace agreed::testing {

/// True as soon as `condition()` is; false if it is not within `deadline`.
template <class Condition>
bool eventually(Condition condition, std::chrono::milliseconds deadline = std::chrono::seconds(10)) {
  const auto until = std::chrono::steady_clock::now() + deadline;
  while (!condition()) {
    if (std::chrono::steady_clock::now() > until) return false;
    std::this_thread::sleep_for(std::chrono::milliseconds(1));
  }
  return true;
}

}  // namespace agreed::testing
