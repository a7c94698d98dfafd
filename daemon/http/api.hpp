#pragma once
// The endpoints: what each path answers once it is known that the asker may ask.
#include <functional>
#include <semaphore>

#include "daemon/engine/service.hpp"
#include "daemon/http/alert_source.hpp"
#include "daemon/http/answer_cache.hpp"
#include "daemon/http/intake_source.hpp"
#include "daemon/http/message.hpp"
#include "daemon/http/target.hpp"
#include "daemon/http/tokens.hpp"

namespace agreed {

/// Every function answers a problem document when the parameters are wrong or the thing does not exist; the
/// parameters are looked at first. Thread-safe.
class Api {
 public:
  /// `service` and `tokens`, of which /health/ready tells what is wrong, outlive the Api. `stopping` tells a
  /// waiting acknowledgement to give up.
  Api(Service& service, Tokens& tokens, AlertSource alerts, IntakeSource intake,
      std::function<bool()> stopping);

  [[nodiscard]] HttpAnswer status(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer charts(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer chart(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer comparisons(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer comparison(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer alerts(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer alert(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer acknowledge(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer intervene(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer resend(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer files(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer readings(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer openapi(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer metrics(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer live(const HttpRequest& request, const Target& target);
  [[nodiscard]] HttpAnswer ready(const HttpRequest& request, const Target& target);

 private:
  /// A list is empty: because it was asked for something that neither is configured nor ever was? Names of
  /// former configurations still have rows, so only an empty answer makes a name wrong.
  [[nodiscard]] std::optional<HttpAnswer> refused_empty(bool empty, const HttpRequest& request,
                                                        const Target& target) const;
  /// Why a wish was not done; nothing when it was, now or before, then `answer` is what the engine said.
  [[nodiscard]] std::optional<HttpAnswer> refused_by(const HttpRequest& request,
                                                     const std::function<std::future<AskAnswer>()>& ask,
                                                     AskAnswer& answer);
  [[nodiscard]] std::optional<AskAnswer> wait_for(std::future<AskAnswer> asked) const;

  Service& service_;
  Tokens& tokens_;
  const AlertSource alerts_;
  const IntakeSource intake_;
  const std::function<bool()> stopping_;
  AnswerCache cache_;
  // A worker waits while the engine commits; some must stay free for those who only look.
  std::counting_semaphore<4> waiting_places_{4};
};

}  // namespace agreed
