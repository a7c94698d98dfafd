#include "daemon/cli/run.hpp"

#include <algorithm>
#include <cerrno>
#include <chrono>
#include <condition_variable>
#include <csignal>
#include <cstdio>
#include <mutex>
#include <optional>
#include <stdexcept>
#include <thread>

#include <fmt/format.h>
#include <pthread.h>
#include <unistd.h>

#include "config/config.hpp"
#include "daemon/cli/reloader.hpp"
#include "daemon/cli/say_problems.hpp"
#include "daemon/cli/service_host.hpp"
#include "daemon/cli/service_manager.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/log.hpp"
#include "daemon/version.hpp"

namespace agreed {
namespace {

// SIGTERM has to end the service within two seconds, whatever a dead network mount holds on to.
constexpr std::chrono::milliseconds kGrace{1'700};
/// From one thread of ours to the one that waits: look around.
constexpr int kNudge = SIGUSR1;

/// SIGTERM, SIGINT and SIGHUP as something to wait for. Blocks them in this thread and all that it starts.
class Signals {
 public:
  Signals() {
    std::signal(SIGPIPE, SIG_IGN);
    sigemptyset(&signals_);
    for (const int signal : {SIGTERM, SIGINT, SIGHUP}) sigaddset(&signals_, signal);
    sigaddset(&signals_, kNudge);
    pthread_sigmask(SIG_BLOCK, &signals_, nullptr);
  }

  /// The next one, or 0 when none came in `most`, if that is given.
  [[nodiscard]] int wait(std::optional<std::chrono::milliseconds> most) const {
    if (!most) return std::max(sigwaitinfo(&signals_, nullptr), 0);
    const timespec patience{most->count() / 1000, most->count() % 1000 * 1'000'000};
    return std::max(sigtimedwait(&signals_, nullptr, &patience), 0);
  }
  /// Ends a wait, from any thread.
  void nudge() const noexcept { pthread_kill(waiting_, kNudge); }

 private:
  sigset_t signals_{};
  pthread_t waiting_ = pthread_self();
};

/// Ends the process if the orderly end takes too long. Everything that counts is committed at any moment.
class Deadline {
 public:
  explicit Deadline(int code)
      : thread_([this, code] {
          std::unique_lock lock(mutex_);
          if (!changed_.wait_until(lock, end_, [this] { return done_; })) _exit(code);
        }) {}
  ~Deadline() {
    {
      const std::lock_guard lock(mutex_);
      done_ = true;
    }
    changed_.notify_one();
    thread_.join();
  }
  Deadline(const Deadline&) = delete;
  Deadline& operator=(const Deadline&) = delete;

 private:
  const std::chrono::steady_clock::time_point end_ = std::chrono::steady_clock::now() + kGrace;
  std::mutex mutex_;
  std::condition_variable changed_;
  bool done_ = false;
  std::thread thread_;
};

std::string state_of(const ServiceHost& host) {
  return "answers on " + host.address();
}

/// Until a signal ends it; the exit code.
int attend(const ServiceHost& host, Reloader& reloader, const Signals& signals) {
  const auto sign_of_life = service_manager::sign_of_life_every();
  auto next_sign = std::chrono::steady_clock::now();
  while (true) {
    const int signal = signals.wait(sign_of_life);
    if (signal == SIGTERM || signal == SIGINT) return kDone;
    if (const auto failure = reloader.failure()) {
      log_error("the service cannot go on after a reload: {}", *failure);
      return kCouldNotDoIt;
    }
    if (signal == SIGHUP) {
      log_info("reading the configuration again");
      service_manager::tell_reloading();
      reloader.ask();
    }
    if (const auto now = std::chrono::steady_clock::now();
        sign_of_life && now >= next_sign && host.gets_on()) {
      service_manager::tell_alive();
      next_sign = now + *sign_of_life;
    }
  }
}

int serve(const Config& config, const Signals& signals) {
  ServiceHost host(config);
  fmt::print("agreed {} answers on {}\n", version(), host.address());
  std::fflush(stdout);
  log_info("agreed {} answers on {}, state in {}", version(), host.address(), config.state.string());
  host.start();
  service_manager::tell_ready(state_of(host));

  Reloader reloader(
      [&host](const std::stop_token& stop) { host.reload(stop); },
      {[&host] { service_manager::tell_ready(state_of(host)); }, [&signals] { signals.nudge(); }});
  const int code = attend(host, reloader, signals);
  service_manager::tell_stopping();
  log_info("stopping");
  const Deadline deadline(code);
  reloader.stop();
  host.stop();
  return code;
}

}  // namespace

int run_service(const std::filesystem::path& config_file) {
  const ConfigResult result = read_config(config_file);
  say_problems(result.problems, config_file);
  if (!result.config) return kWrongUse;
  const Signals signals;
  try {
    const int code = serve(*result.config, signals);
    log_info("stopped");
    close_log();
    return code;
  } catch (const std::exception& error) {
    fmt::print(stderr, "agreed: {}\n", error.what());
    return kCouldNotDoIt;
  }
}

}  // namespace agreed
