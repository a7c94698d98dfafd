#pragma once
// The running service: everything of it put together, and put together anew when the configuration changes.
#include <filesystem>
#include <memory>
#include <optional>
#include <stop_token>
#include <string>
#include <vector>

#include "config/config.hpp"
#include "daemon/engine/present_engine.hpp"
#include "daemon/http/http_side.hpp"
#include "daemon/intake/folder_watcher.hpp"
#include "daemon/journal/journal.hpp"
#include "daemon/webhook/sender.hpp"

namespace agreed {

class ServiceHost {
 public:
  /// Locks the state folder, opens the journal and listens. Throws when any of it cannot be had.
  explicit ServiceHost(const Config& config);
  /// Stops.
  ~ServiceHost();
  ServiceHost(const ServiceHost&) = delete;
  ServiceHost& operator=(const ServiceHost&) = delete;

  /// Answers, watches and sends from now on.
  void start();

  /// Reads the configuration file again. If it can be used, intake pauses until the journal is in the hands
  /// of an engine that works by it; files wait in their inboxes, and what is shown stays as it was until the
  /// journal is folded, which is waited for. If not, the log says every problem, /health/ready the first,
  /// and everything goes on. The state folder and `listen` stay as they are. From one thread at a time; gives
  /// up early when `stop` asks for it. Throws when the service cannot go on at all.
  void reload(const std::stop_token& stop);

  /// Ends everything; a folder that hangs, or a long batch, may hold it up. Not during reload.
  void stop() noexcept;

  /// False when the engine has been at one piece of work for minutes: something is stuck.
  [[nodiscard]] bool gets_on() const;
  [[nodiscard]] const std::string& address() const { return address_; }

 private:
  /// What serves under one configuration.
  struct Service {
    Config config;
    std::shared_ptr<Engine> engine;
    std::vector<std::unique_ptr<FolderWatcher>> watchers;  // they go first: they use the others
  };

  [[nodiscard]] std::unique_ptr<Service> with_engine(Config config, std::shared_ptr<Engine> engine) const;
  void start(Service& service, const Service* before);
  /// The configuration in the file, with what cannot change as it is; nothing, and said, if it is of no use.
  [[nodiscard]] std::optional<Config> usable_configuration();
  /// The log says all of it, /health/ready the first.
  void refuse(const std::vector<std::string>& problems);
  /// Watchers whose folder hangs are kept, with all they use, until it answers.
  void leave_behind(std::unique_ptr<Service> service);

  const std::filesystem::path file_;
  const Listen listen_;
  const std::filesystem::path state_;
  std::unique_ptr<StateLock> lock_;
  std::unique_ptr<Service> service_;
  std::vector<std::unique_ptr<Service>> left_behind_;
  PresentEngine present_;
  HttpSide http_;
  std::string address_;
  std::unique_ptr<WebhookSender> sender_;
};

}  // namespace agreed
