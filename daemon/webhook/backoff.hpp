#pragma once
// When a message is tried again, and when no more. Pure: time and chance are arguments.
#include <optional>

#include "core/base/instant.hpp"
#include "daemon/journal/journal.hpp"

namespace agreed {

/// "Gone" (RFC 9110, 15.5.11): the endpoint wants no more messages.
inline constexpr int kHttpGone = 410;

struct RetryPolicy {
  Duration first = std::chrono::seconds(1);
  Duration most = std::chrono::hours(1);
  Duration give_up_after = std::chrono::hours(72);
  /// A message is never given up before so many tries, however old it is: after days switched off, or a clock
  /// set forward, the first failure must not be the last try. Ten tries are about a quarter of an hour.
  int least_tries = 10;
};

/// What came of one call.
struct CallOutcome {
  int status = 0;                       ///< HTTP status; 0 = none came
  std::string error;                    ///< in words, when no answer came
  std::optional<Duration> retry_after;  ///< what the answer asked for
};

/// Wait before the next try after `tries` >= 1 failed ones: exponential with full jitter, that is between 0
/// and first * 2^tries, held within [first, most]. `uniform` in [0, 1) is the chance.
[[nodiscard]] Duration backoff(int tries, double uniform, const RetryPolicy& policy);

/// The record of a try. Delivered: any 2xx. Given up: 410, or a failure when the message is older than
/// give_up_after. Otherwise next_due = `now` + backoff, or what Retry-After asks if that is later, at most
/// `most`; the last try is due when give_up_after ends. `error` says in words what was wrong.
[[nodiscard]] DeliveryTry judge(const OutboxMessage& message, const CallOutcome& outcome, Instant now,
                                double uniform, const RetryPolicy& policy);

}  // namespace agreed
