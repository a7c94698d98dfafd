#include "daemon/webhook/backoff.hpp"

#include <algorithm>
#include <cmath>

namespace agreed {
namespace {

std::string status_words(int status) {
  std::string words = "the endpoint answered " + std::to_string(status);
  if (status == kHttpGone) return words + " (gone): it wants no more messages";
  if (status >= 300 && status < 400) return words + ": redirects are not followed";
  return words;
}

}  // namespace

Duration backoff(int tries, double uniform, const RetryPolicy& policy) {
  // 2^30 s is far above any `most`; beyond it the power would only overflow.
  const int doublings = std::clamp(tries, 0, 30);
  const double highest = std::min(std::ldexp(static_cast<double>(policy.first.count()), doublings),
                                  static_cast<double>(policy.most.count()));
  const auto drawn = Duration(static_cast<Duration::rep>(highest * std::clamp(uniform, 0.0, 1.0)));
  return std::clamp(drawn, std::min(policy.first, policy.most), policy.most);
}

DeliveryTry judge(const OutboxMessage& message, const CallOutcome& outcome, Instant now, double uniform,
                  const RetryPolicy& policy) {
  DeliveryTry attempt;
  attempt.message = message.id;
  attempt.at = now;
  attempt.status = outcome.status;
  attempt.delivered = outcome.status >= 200 && outcome.status < 300;
  if (attempt.delivered) return attempt;

  attempt.error = !outcome.error.empty() ? outcome.error : status_words(outcome.status);
  const int tries = message.tries + 1;
  const Instant end = message.created_at + policy.give_up_after;
  attempt.given_up = outcome.status == kHttpGone || (now >= end && tries >= policy.least_tries);
  if (attempt.given_up) return attempt;

  const Duration asked = std::min(outcome.retry_after.value_or(Duration::zero()), policy.most);
  Instant due = now + std::max(backoff(tries, uniform, policy), asked);
  if (now < end) due = std::min(due, end);
  attempt.next_due = due;
  return attempt;
}

}  // namespace agreed
