#include "daemon/cli/reloader.hpp"

#include <exception>
#include <utility>

#include "daemon/thread_name.hpp"

namespace agreed {

Reloader::Reloader(Reload reload, Then then)
    : reload_(std::move(reload)),
      then_(std::move(then)),
      thread_([this](const std::stop_token& stop) { run(stop); }) {}

void Reloader::ask() {
  {
    const std::lock_guard lock(mutex_);
    asked_ = true;
  }
  asked_for_.notify_one();
}

void Reloader::stop() noexcept {
  thread_.request_stop();
  if (thread_.joinable()) thread_.join();
}

std::optional<std::string> Reloader::failure() const {
  const std::lock_guard lock(mutex_);
  return failure_;
}

void Reloader::run(const std::stop_token& stop) {
  name_this_thread("reload");
  while (true) {
    {
      std::unique_lock lock(mutex_);
      if (!asked_for_.wait(lock, stop, [this] { return asked_; })) return;
      asked_ = false;
    }
    try {
      reload_(stop);
    } catch (const std::exception& error) {
      {
        const std::lock_guard lock(mutex_);
        failure_ = error.what();
      }
      return then_.failed();
    }
    if (!stop.stop_requested()) then_.over();
  }
}

}  // namespace agreed
