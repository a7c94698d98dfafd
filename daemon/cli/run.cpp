#include "daemon/cli/run.hpp"

#include <chrono>
#include <condition_variable>
#include <csignal>
#include <cstdio>
#include <filesystem>
#include <memory>
#include <mutex>
#include <thread>
#include <vector>

#include <fmt/format.h>
#include <pthread.h>
#include <systemd/sd-daemon.h>
#include <unistd.h>

#include "config/config.hpp"
#include "daemon/cli/listen_url.hpp"
#include "daemon/cli/say_problems.hpp"
#include "daemon/clock.hpp"
#include "daemon/engine/engine.hpp"
#include "daemon/exit_codes.hpp"
#include "daemon/http/http_side.hpp"
#include "daemon/http/intake_source.hpp"
#include "daemon/intake/folder_watcher.hpp"
#include "daemon/journal/journal.hpp"
#include "daemon/log.hpp"
#include "daemon/page_source.hpp"
#include "daemon/version.hpp"
#include "daemon/webhook/sender.hpp"

namespace agreed {
namespace {

// SIGTERM has to end the service within two seconds, whatever a dead network mount holds on to.
constexpr std::chrono::milliseconds kGrace{1'700};

/// SIGTERM and SIGINT as something to wait for. Blocks them in this thread and all that it starts.
class StopSignals {
 public:
  StopSignals() {
    std::signal(SIGPIPE, SIG_IGN);
    sigemptyset(&signals_);
    sigaddset(&signals_, SIGTERM);
    sigaddset(&signals_, SIGINT);
    pthread_sigmask(SIG_BLOCK, &signals_, nullptr);
  }

  void wait() const {
    int signal = 0;
    sigwait(&signals_, &signal);
  }

 private:
  sigset_t signals_{};
};

/// Ends the process if the orderly end takes too long. Everything that counts is committed at any moment.
class Deadline {
 public:
  Deadline()
      : thread_([this] {
          std::unique_lock lock(mutex_);
          if (!changed_.wait_until(lock, end_, [this] { return done_; })) _exit(kDone);
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

/// Each route thread reads the outbox over a connection of its own.
WebhookSender::Next outbox_of(const std::filesystem::path& state) {
  return [state](const std::string& route) {
    thread_local std::unique_ptr<JournalReader> reader;
    if (!reader) reader = std::make_unique<JournalReader>(state);
    return reader->next_message(route);
  };
}

std::vector<Endpoint> endpoints_of(const Config& config) {
  std::vector<Endpoint> endpoints;
  for (const Route& route : config.routes) endpoints.push_back(endpoint_of(route));
  return endpoints;
}

/// Stops the engine before what it calls is gone, also when an exception leaves.
class EngineStop {
 public:
  explicit EngineStop(Engine& engine) : engine_(engine) {}
  ~EngineStop() { engine_.stop(); }
  EngineStop(const EngineStop&) = delete;
  EngineStop& operator=(const EngineStop&) = delete;

 private:
  Engine& engine_;
};

/// The service from the first file descriptor to the last; destructors end it in the reverse order.
int serve(const Config& config, const StopSignals& signals) {
  std::filesystem::create_directories(config.state);
  const StateLock lock(config.state);
  auto journal = std::make_unique<Journal>(config.state);

  Engine engine(config, std::move(journal));
  const AlertSource alerts = journal_alerts(config.state);
  HttpSide http(config.listen, config.tokens_file, engine, alerts,
                pages_of(engine, alerts, journal_intake(config.state)),
                [](const std::string& trouble) { log_warning("http: {}", trouble); });
  WebhookSender sender(endpoints_of(config), outbox_of(config.state),
                       [&engine](const DeliveryTry& attempt) { return engine.record(attempt); });
  const std::string address = listen_url(config.listen.address, http.port());
  http.start();
  fmt::print("agreed {} answers on {}\n", version(), address);
  std::fflush(stdout);
  log_info("agreed {} answers on {}, state in {}", version(), address, config.state.string());

  engine.start(
      config.page_url.value_or(address), [&sender](const std::string& route) { sender.wake(route); },
      [&sender](const std::string& route) { sender.resume(route); });
  const EngineStop engine_stop(engine);
  std::vector<std::unique_ptr<FolderWatcher>> watchers;
  for (std::uint32_t i = 0; i < config.intake.size(); ++i)
    watchers.push_back(
        std::make_unique<FolderWatcher>(config.intake[i], *config.settings, AnalyzerIndex{i}, engine));
  for (std::uint32_t i = 0; i < watchers.size(); ++i) {
    engine.watch_over(AnalyzerIndex{i}, watchers[i]->pulse(), config.intake[i].rescan);
    watchers[i]->start();
  }
  sd_notify(0, "READY=1");

  signals.wait();
  sd_notify(0, "STOPPING=1");
  log_info("stopping");
  const Deadline deadline;
  http.stop();
  sender.stop();
  engine.stop();
  watchers.clear();
  return kDone;
}

}  // namespace

int run_service(const std::filesystem::path& config_file) {
  const ConfigResult result = read_config(config_file);
  say_problems(result.problems, config_file);
  if (!result.config) return kWrongUse;
  const StopSignals signals;
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
