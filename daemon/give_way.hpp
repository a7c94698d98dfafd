#pragma once

#include <thread>

namespace agreed {

/// Said once a file by those who work through many. A kernel without preemption lets a thread that has just
/// been woken to answer somebody wait behind them until the next tick, 4 ms; this way it waits for one file.
inline void give_way() noexcept {
  std::this_thread::yield();
}

}  // namespace agreed
