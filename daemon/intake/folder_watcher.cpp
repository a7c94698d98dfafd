#include "daemon/intake/folder_watcher.hpp"

#include <atomic>
#include <string>
#include <thread>

#include "daemon/intake/watch_loop.hpp"
#include "daemon/thread_name.hpp"

namespace agreed {

struct FolderWatcher::Impl {
  std::string name;  // of the thread
  WatchLoop loop;
  std::atomic<bool> running = false;
  std::jthread thread;
};

FolderWatcher::FolderWatcher(const IntakeSettings& intake, const Settings& settings, AnalyzerIndex analyzer,
                             IntakeSink& sink, const WatcherLimits& limits)
    : impl_(new Impl{"inbox " + settings.analyzers[analyzer.value].id,
                     {intake, settings, analyzer, sink, limits},
                     false,
                     {}}) {}

FolderWatcher::~FolderWatcher() {
  stop();
}

void FolderWatcher::follow(const FolderWatcher& before) {
  impl_->loop.follow(before.impl_->loop);
}

void FolderWatcher::start() {
  if (impl_->thread.joinable()) return;
  impl_->running = true;
  impl_->thread = std::jthread([impl = impl_.get()](const std::stop_token& stop) {
    name_this_thread(impl->name);
    impl->loop.run(stop);
    impl->running = false;
  });
}

void FolderWatcher::request_stop() {
  impl_->thread.request_stop();
  impl_->loop.wake();
}

void FolderWatcher::stop() {
  request_stop();
  if (impl_->thread.joinable()) impl_->thread.join();
}

std::shared_ptr<const Pulse> FolderWatcher::pulse() const {
  return impl_->loop.pulse();
}

bool FolderWatcher::stopped() const {
  return !impl_->running;
}

}  // namespace agreed
