#include "daemon/cli/service_host.hpp"

#include <algorithm>
#include <chrono>
#include <thread>

#include "core/base/rfc3339.hpp"
#include "daemon/cli/listen_url.hpp"
#include "daemon/clock.hpp"
#include "daemon/http/access.hpp"
#include "daemon/http/intake_source.hpp"
#include "daemon/log.hpp"
#include "daemon/page_source.hpp"
#include "daemon/version.hpp"

namespace agreed {
namespace {

constexpr std::chrono::milliseconds kPoll{20};
/// How long a reload waits for watchers to end; whose folder hangs does not.
constexpr std::chrono::seconds kWatcherEnds{2};
/// One row read, one batch written or one stream folded takes far less.
constexpr std::chrono::minutes kStuck{3};

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

void tell_of_http(const std::string& trouble) {
  log_warning("http: {}", trouble);
}

void tell_http_is_well(const std::string& words) {
  log_info("http: {}", words);
}

std::filesystem::path made(const std::filesystem::path& folder) {
  std::filesystem::create_directories(folder);
  return folder;
}

bool same(const Listen& a, const Listen& b) {
  return a.address == b.address && a.port == b.port && a.open_to_network == b.open_to_network &&
         a.behind_proxy == b.behind_proxy;
}

bool ended(const std::vector<std::unique_ptr<FolderWatcher>>& watchers) {
  return std::all_of(watchers.begin(), watchers.end(),
                     [](const auto& watcher) { return watcher->stopped(); });
}

}  // namespace

ServiceHost::ServiceHost(const Config& config)
    : file_(config.file),
      listen_(config.listen),
      state_(made(config.state)),
      lock_(std::make_unique<StateLock>(state_)),
      service_(with_engine(config, std::make_shared<Engine>(config, std::make_unique<Journal>(state_)))),
      present_(service_->engine),
      http_(listen_, config.tokens_file, present_, journal_alerts(state_),
            pages_of(present_, journal_alerts(state_), journal_intake(state_)), tell_of_http,
            tell_http_is_well),
      address_(listen_url(listen_.address, http_.port())),
      sender_(std::make_unique<WebhookSender>(
          endpoints_of(config), outbox_of(state_),
          [this](const DeliveryTry& attempt) { return present_.record(attempt); })) {}

ServiceHost::~ServiceHost() {
  stop();
}

std::unique_ptr<ServiceHost::Service> ServiceHost::with_engine(Config config,
                                                               std::shared_ptr<Engine> engine) const {
  auto service = std::make_unique<Service>();
  service->config = std::move(config);
  service->engine = std::move(engine);
  return service;
}

void ServiceHost::start() {
  http_.start();
  start(*service_, nullptr);
}

void ServiceHost::start(Service& service, const Service* before) {
  const Config& config = service.config;
  service.engine->start(
      config.page_url.value_or(address_), [this](const std::string& route) { sender_->wake(route); },
      [this](const std::string& route) { sender_->resume(route); });
  for (std::uint32_t i = 0; i < config.intake.size(); ++i) {
    const IntakeSettings& intake = config.intake[i];
    auto watcher =
        std::make_unique<FolderWatcher>(intake, *config.settings, AnalyzerIndex{i}, *service.engine);
    if (before != nullptr)
      for (std::size_t old = 0; old < before->watchers.size(); ++old)
        if (before->config.intake[old].inbox == intake.inbox && before->watchers[old]->stopped())
          watcher->follow(*before->watchers[old]);
    service.watchers.push_back(std::move(watcher));
  }
  for (std::uint32_t i = 0; i < service.watchers.size(); ++i) {
    service.engine->watch_over(AnalyzerIndex{i}, service.watchers[i]->pulse(), config.intake[i].rescan);
    service.watchers[i]->start();
  }
}

void ServiceHost::refuse(const std::vector<std::string>& problems) {
  for (const std::string& problem : problems) log_error("configuration not taken in: {}", problem);
  log_error("the configuration was not taken in; the one in force goes on");
  std::string words = "the configuration file was read again at " + to_rfc3339(now_utc()) +
                      " and not taken in, the one before goes on: " + problems.front();
  if (problems.size() > 1) words += " (and " + std::to_string(problems.size() - 1) + " more, see the log)";
  present_.get()->remark_on_configuration(std::move(words));
}

std::optional<Config> ServiceHost::usable_configuration() {
  ConfigResult result = read_config(file_);
  std::vector<std::string> problems;
  for (const ConfigProblem& problem : result.problems) {
    if (problem.warning)
      log_warning("{}", to_string(problem, file_));
    else
      problems.push_back(to_string(problem, file_));
  }
  if (result.config) {
    try {
      (void)endpoints_of(*result.config);
      Tokens tokens(result.config->tokens_file, [](const std::string&) {});  // told once they are in use
      require_reader_token(listen_, tokens);
      return std::move(result.config);
    } catch (const std::exception& error) {
      problems.emplace_back(error.what());
    }
  }
  refuse(problems);
  return std::nullopt;
}

void ServiceHost::reload(const std::stop_token& stop) {
  auto config = usable_configuration();
  if (!config) return;
  std::string only_at_start;
  if (!same(config->listen, listen_)) only_at_start = "listen";
  if (config->state != state_) only_at_start += only_at_start.empty() ? "state" : " and state";
  if (!only_at_start.empty()) {
    only_at_start +=
        " changed in the configuration file and stay as they are until the service is started again";
    log_warning("{}", only_at_start);
  }
  config->listen = listen_;
  config->state = state_;
  sender_->change(endpoints_of(*config));  // while what they did can still be recorded

  // Whoever reads a folder hears of the end first: what the engine then refuses is no failed commit.
  for (const auto& watcher : service_->watchers) watcher->request_stop();
  service_->engine->stop();
  const auto give_up = std::chrono::steady_clock::now() + kWatcherEnds;
  while (!ended(service_->watchers) && std::chrono::steady_clock::now() < give_up && !stop.stop_requested())
    std::this_thread::sleep_for(kPoll);
  if (stop.stop_requested()) return;

  auto engine = std::make_shared<Engine>(*config, service_->engine->leave());
  auto after = with_engine(std::move(*config), engine);
  http_.use_tokens(after->config.tokens_file);
  engine->remark_on_configuration(std::move(only_at_start));
  start(*after, service_.get());
  present_.replace(engine);
  service_.swap(after);
  leave_behind(std::move(after));
  const auto folded = engine->first_turn();
  while (folded.wait_for(kPoll) != std::future_status::ready)
    if (stop.stop_requested()) return;
  log_info("the configuration {} is in force, SHA-256 {}", file_.string(), engine->snapshot()->config_sha256);
}

void ServiceHost::leave_behind(std::unique_ptr<Service> service) {
  std::erase_if(left_behind_, [](const auto& left) { return ended(left->watchers); });
  if (ended(service->watchers)) return;
  for (std::size_t i = 0; i < service->watchers.size(); ++i)
    if (!service->watchers[i]->stopped())
      log_warning("{}: the folder does not answer; its watcher of before the reload ends when it does",
                  service->config.intake[i].analyzer);
  left_behind_.push_back(std::move(service));
}

void ServiceHost::stop() noexcept {
  http_.stop();
  for (const auto& watcher : service_->watchers) watcher->request_stop();
  sender_->stop();
  service_->engine->stop();
  service_->watchers.clear();
  left_behind_.clear();
}

bool ServiceHost::gets_on() const {
  const auto since = present_.get()->busy_since();
  return !since || Pulse::Clock::now() - *since < kStuck;
}

}  // namespace agreed
