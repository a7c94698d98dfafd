#include "daemon/webhook/sender.hpp"

#include <algorithm>
#include <atomic>
#include <condition_variable>
#include <mutex>
#include <random>
#include <thread>

#include "daemon/clock.hpp"
#include "daemon/thread_name.hpp"
#include "daemon/webhook/retry_after.hpp"

namespace agreed {
namespace {

using Steady = std::chrono::steady_clock;

/// How long a try that was made may still be recorded after stop was asked for.
constexpr Duration kLastRecord = std::chrono::milliseconds(500);
constexpr Duration kPoll = std::chrono::milliseconds(20);
constexpr Duration kLongestTrouble = std::chrono::minutes(1);

}  // namespace

/// One route and its thread.
class WebhookSender::Lane {
 public:
  Lane(Endpoint endpoint, const Next& next, const Record& record, const SenderOptions& options)
      : endpoint_(std::move(endpoint)), next_(next), record_(record), options_(options) {
    thread_ = std::jthread([this](const std::stop_token& stop) { run(stop); });
  }

  void wake() {
    const std::lock_guard lock(mutex_);
    ++wakes_;
    changed_.notify_all();
  }
  void resume() {
    ended_ = false;
    wake();
  }
  void request_stop() { thread_.request_stop(); }
  void join() {
    if (thread_.joinable()) thread_.join();
  }
  [[nodiscard]] const Endpoint& endpoint() const { return endpoint_; }
  [[nodiscard]] const std::string& route() const { return endpoint_.route; }
  [[nodiscard]] bool ended() const { return ended_; }

 private:
  void run(const std::stop_token& stop) {
    name_this_thread("send " + endpoint_.route);
    Duration trouble = options_.after_trouble;
    while (!stop.stop_requested()) {
      try {
        step(stop);
        trouble = options_.after_trouble;
      } catch (...) {
        // The journal could not be asked, or memory is short: nothing was lost, ask again later.
        pause(stop, trouble, wakes());
        trouble = std::min(2 * trouble, kLongestTrouble);
      }
    }
  }

  /// Sends the oldest message if it is due, else waits for that, or for news.
  void step(const std::stop_token& stop) {
    const std::uint64_t news = wakes();
    if (ended_) return pause(stop, options_.longest_wait, news);
    const auto message = next_(endpoint_.route);
    if (!message) return pause(stop, options_.longest_wait, news);
    const Duration wait = time_until_due(*message);
    if (wait > Duration::zero()) return pause(stop, wait, news);
    attempt(*message, stop);
  }

  /// The due time of a message is fixed on the steady clock when it is first seen, or tried, by this process.
  Duration time_until_due(const OutboxMessage& message) {
    if (message_ != message.id) {
      message_ = message.id;
      set_due(message.tries > 0 ? Duration::zero() : message.due_at - now_utc());
    }
    return std::chrono::ceil<Duration>(due_ - Steady::now());
  }

  void set_due(Duration from_now) {
    due_ = Steady::now() + std::clamp(from_now, Duration::zero(), options_.longest_wait);
  }

  void attempt(const OutboxMessage& message, const std::stop_token& stop) {
    const Instant at = now_utc();
    const CallOutcome outcome = call(message, at, stop);
    if (outcome.status == 0 && stop.stop_requested()) return;  // nothing is known of it: made again at start
    const double chance = std::uniform_real_distribution<double>(0.0, 1.0)(random_);
    const DeliveryTry result = judge(message, outcome, now_utc(), chance, options_.retry);
    // Before it is recorded: whoever sees the message given up may ask for it again at once.
    if (result.status == kHttpGone) ended_ = true;
    if (!record(result, stop)) return;
    if (result.next_due)
      set_due(*result.next_due - now_utc());
    else
      message_ = 0;
  }

  CallOutcome call(const OutboxMessage& message, Instant at, const std::stop_token& stop) {
    try {
      const CallAnswer answer =
          deliver(endpoint_, message.webhook_id, message.body, at, options_.limits, stop);
      return {answer.status, answer.error, parse_retry_after(answer.retry_after, now_utc())};
    } catch (const std::exception& failure) {
      return {0, std::string("the message could not be sent: ") + failure.what(), std::nullopt};
    }
  }

  /// Until it is stored; false when stop came first.
  bool record(const DeliveryTry& result, const std::stop_token& stop) {
    Duration trouble = options_.after_trouble;
    while (true) {
      try {
        auto stored = record_(result);
        if (!wait_for(stored, stop)) return false;
        stored.get();
        return true;
      } catch (...) {
        if (stop.stop_requested()) return false;
        pause(stop, trouble, std::nullopt);
        trouble = std::min(2 * trouble, kLongestTrouble);
      }
    }
  }

  static bool wait_for(const std::future<void>& stored, const std::stop_token& stop) {
    auto give_up = Steady::time_point::max();
    while (stored.wait_for(kPoll) == std::future_status::timeout) {
      if (stop.stop_requested() && give_up == Steady::time_point::max())
        give_up = Steady::now() + kLastRecord;
      if (Steady::now() >= give_up) return false;
    }
    return true;
  }

  /// Waits, but not after stop, nor after a wake that came since `news` was read.
  void pause(const std::stop_token& stop, Duration most, std::optional<std::uint64_t> news) {
    std::unique_lock lock(mutex_);
    changed_.wait_until(lock, stop, Steady::now() + most, [&] { return news && wakes_ != *news; });
  }

  std::uint64_t wakes() {
    const std::lock_guard lock(mutex_);
    return wakes_;
  }

  const Endpoint endpoint_;
  const Next next_;
  const Record record_;
  const SenderOptions options_;

  std::int64_t message_ = 0;  ///< the one that `due_` is of; 0: none
  Steady::time_point due_{};
  std::mt19937_64 random_{std::random_device{}()};
  std::atomic<bool> ended_ = false;

  std::mutex mutex_;
  std::condition_variable_any changed_;
  std::uint64_t wakes_ = 0;
  std::jthread thread_;  // last: it uses all of the above
};

WebhookSender::WebhookSender(std::vector<Endpoint> endpoints, const Next& next, const Record& record,
                             SenderOptions options)
    : next_(next), record_(record), options_(options) {
  change(std::move(endpoints));
}

WebhookSender::~WebhookSender() {
  stop();
}

WebhookSender::Lanes WebhookSender::lanes() const {
  const std::lock_guard lock(mutex_);
  return lanes_;
}

void WebhookSender::change(std::vector<Endpoint> endpoints) {
  const Lanes before = lanes();
  Lanes after;
  const auto same = [](const Endpoint& endpoint) {
    return [&endpoint](const std::shared_ptr<Lane>& lane) { return lane->endpoint() == endpoint; };
  };
  const auto goes_on = [&endpoints](const Lane& lane) {
    return std::find(endpoints.begin(), endpoints.end(), lane.endpoint()) != endpoints.end();
  };
  // The old lane of a route ends before the new one begins: two would send its messages twice.
  for (const auto& lane : before)
    if (!goes_on(*lane)) lane->request_stop();
  for (const auto& lane : before)
    if (!goes_on(*lane)) lane->join();
  for (auto& endpoint : endpoints) {
    const auto kept = std::find_if(before.begin(), before.end(), same(endpoint));
    after.push_back(
        kept != before.end() ? *kept : std::make_shared<Lane>(std::move(endpoint), next_, record_, options_));
  }
  const std::lock_guard lock(mutex_);
  lanes_ = std::move(after);
}

void WebhookSender::wake(const std::string& route) {
  for (const auto& lane : lanes())
    if (lane->route() == route) lane->wake();
}

void WebhookSender::resume(const std::string& route) {
  for (const auto& lane : lanes())
    if (lane->route() == route) lane->resume();
}

std::vector<std::string> WebhookSender::ended() const {
  std::vector<std::string> routes;
  for (const auto& lane : lanes())
    if (lane->ended()) routes.push_back(lane->route());
  return routes;
}

void WebhookSender::stop() {
  const Lanes all = lanes();
  for (const auto& lane : all) lane->request_stop();
  for (const auto& lane : all) lane->join();
}

}  // namespace agreed
