#pragma once
// Sends what waits in the outbox: one thread for each route, so that a slow endpoint delays no other; within
// a route in order, so a message that fails is tried again before the next one is. At least once: a try is
// recorded after it was made, and after a crash in between it is made again under the same webhook-id.
#include <functional>
#include <future>
#include <memory>
#include <mutex>
#include <optional>
#include <string>
#include <vector>

#include "daemon/journal/journal.hpp"
#include "daemon/webhook/backoff.hpp"
#include "daemon/webhook/endpoint.hpp"

namespace agreed {

struct SenderOptions {
  CallLimits limits;
  RetryPolicy retry;
  Duration longest_wait =
      std::chrono::hours(1);  ///< no due time is waited for longer, whatever the clock did
  Duration after_trouble =
      std::chrono::seconds(1);  ///< first wait after a callback failed; doubles to a minute
};

class WebhookSender {
 public:
  /// The route's oldest message that is neither delivered nor given up; called on the route's thread. If it
  /// throws it is asked again later.
  using Next = std::function<std::optional<OutboxMessage>(const std::string& route)>;
  /// Stores a try; the future is ready once that is committed. If it fails the same try is recorded again
  /// before anything else is sent.
  using Record = std::function<std::future<void>(DeliveryTry)>;

  /// Starts the threads. Messages tried before this start are due at once.
  WebhookSender(std::vector<Endpoint> endpoints, const Next& next, const Record& record,
                SenderOptions options = {});
  ~WebhookSender();
  WebhookSender(const WebhookSender&) = delete;
  WebhookSender& operator=(const WebhookSender&) = delete;

  /// Sends to these endpoints from now on. What goes to an endpoint that is the same goes on undisturbed; a
  /// call to one that is gone is cut off and not recorded. Throws when a thread cannot be made.
  void change(std::vector<Endpoint> endpoints);

  /// New messages of the route were committed. Any thread.
  void wake(const std::string& route);

  /// Somebody asks for a message of the route again: as wake(), and an endpoint that answered 410 is tried
  /// again. Any thread.
  void resume(const std::string& route);

  /// Routes whose endpoint answered 410: nothing is sent there any more until resume() or the next start;
  /// what waits is kept.
  [[nodiscard]] std::vector<std::string> ended() const;

  /// Ends the threads, in less than a second even during a call; such a call is not recorded and made again
  /// at the next start. Harmless when repeated. Not from within a callback.
  void stop();

 private:
  class Lane;
  using Lanes = std::vector<std::shared_ptr<Lane>>;
  [[nodiscard]] Lanes lanes() const;

  const Next next_;
  const Record record_;
  const SenderOptions options_;
  mutable std::mutex mutex_;
  Lanes lanes_;
};

}  // namespace agreed
