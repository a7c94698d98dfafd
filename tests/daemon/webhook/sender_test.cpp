#include "daemon/webhook/sender.hpp"

#include <algorithm>
#include <condition_variable>
#include <map>
#include <mutex>
#include <stdexcept>

#include <doctest/doctest.h>

#include "tests/daemon/webhook/receiver.hpp"

using namespace agreed;
using namespace std::chrono_literals;
using test::answer;
using test::Receiver;

namespace {

Instant now() {
  return std::chrono::floor<Duration>(std::chrono::system_clock::now());
}

/// An outbox in memory, as the journal keeps it.
class Outbox {
 public:
  void add(const std::string& route, std::int64_t id, Duration due_in = 0ms, int tries = 0) {
    const std::lock_guard lock(mutex_);
    OutboxMessage message;
    message.id = id;
    message.route = route;
    message.webhook_id = "msg_" + std::to_string(id);
    message.body = "{\"n\":" + std::to_string(id) + "}";
    message.created_at = now();
    message.due_at = now() + due_in;
    message.tries = tries;
    messages_[id] = message;
  }

  std::optional<OutboxMessage> next(const std::string& route) {
    const std::lock_guard lock(mutex_);
    if (next_failures_ > 0) {
      --next_failures_;
      throw std::runtime_error("the journal is locked");
    }
    for (const auto& [id, message] : messages_)
      if (message.route == route) return message;
    return std::nullopt;
  }

  std::future<void> record(const DeliveryTry& result) {
    const std::lock_guard lock(mutex_);
    std::promise<void> stored;
    if (record_failures_ > 0) {
      --record_failures_;
      failed_.push_back(result);
      if (record_failures_ % 2 == 0) throw std::runtime_error("the queue is full");
      stored.set_exception(std::make_exception_ptr(std::runtime_error("disk full")));
      return stored.get_future();
    }
    tries_.push_back(result);
    auto& message = messages_.at(result.message);
    ++message.tries;
    if (result.next_due) message.due_at = *result.next_due;
    if (result.delivered || result.given_up) messages_.erase(result.message);
    changed_.notify_all();
    stored.set_value();
    return stored.get_future();
  }

  /// Waits, at most ten seconds, for that many tries, and gives all there are.
  std::vector<DeliveryTry> wait_for(std::size_t count) {
    std::unique_lock lock(mutex_);
    changed_.wait_for(lock, 10s, [&] { return tries_.size() >= count; });
    return tries_;
  }

  void fail_next(int times) {
    const std::lock_guard lock(mutex_);
    next_failures_ = times;
  }
  void fail_record(int times) {
    const std::lock_guard lock(mutex_);
    record_failures_ = times;
  }
  std::vector<DeliveryTry> failed() {
    const std::lock_guard lock(mutex_);
    return failed_;
  }

 private:
  std::mutex mutex_;
  std::condition_variable changed_;
  std::map<std::int64_t, OutboxMessage> messages_;
  std::vector<DeliveryTry> tries_, failed_;
  int next_failures_ = 0, record_failures_ = 0;
};

SenderOptions quick() {
  SenderOptions options;
  options.limits.whole = 500ms;
  options.retry.first = 10ms;
  options.retry.most = 20ms;
  options.after_trouble = 10ms;
  return options;
}

Endpoint endpoint(const std::string& route, const std::string& url) {
  return {route, url, std::nullopt, {signing_key("whsec_c2VjcmV0")}};
}

WebhookSender sender_of(Outbox& outbox, std::vector<Endpoint> endpoints, SenderOptions options = quick()) {
  return WebhookSender(
      std::move(endpoints), [&outbox](const std::string& route) { return outbox.next(route); },
      [&outbox](const DeliveryTry& result) { return outbox.record(result); }, options);
}

std::vector<std::string> bodies(const std::vector<test::Received>& received) {
  std::vector<std::string> list;
  for (const auto& one : received) list.push_back(one.body);
  return list;
}

}  // namespace

TEST_CASE("messages go out in order, signed, as they are stored") {
  Outbox outbox;
  for (const int id : {1, 2, 3}) outbox.add("shift", id);
  Receiver receiver({answer(200)});
  auto sender = sender_of(outbox, {endpoint("shift", receiver.url())});
  const auto tries = outbox.wait_for(3);
  REQUIRE(tries.size() == 3);
  for (const auto& result : tries) {
    CHECK(result.delivered);
    CHECK(result.status == 200);
    CHECK(result.error.empty());
  }
  const auto got = receiver.wait_for(3);
  CHECK(bodies(got) == std::vector<std::string>{"{\"n\":1}", "{\"n\":2}", "{\"n\":3}"});
  for (const auto& one : got) {
    CHECK(one.header("content-type") == "application/cloudevents+json; charset=utf-8");
    const Instant at{std::chrono::seconds(std::stoll(one.header("webhook-timestamp")))};
    CHECK(std::chrono::abs(now() - at) < 20s);
    CHECK(one.header("webhook-signature") ==
          webhook_signature(one.header("webhook-id"), at, one.body, std::vector{signing_key("secret")}));
  }
}

TEST_CASE("500, 302 and then 200: the same webhook-id each time, and the next message waits for it") {
  Outbox outbox;
  outbox.add("shift", 1);
  outbox.add("shift", 2);
  Receiver receiver({answer(500), answer(302, "Location: /elsewhere\r\n"), answer(200)});
  auto sender = sender_of(outbox, {endpoint("shift", receiver.url())});
  const auto tries = outbox.wait_for(4);
  REQUIRE(tries.size() == 4);
  CHECK(tries[0].status == 500);
  CHECK(tries[0].next_due);
  CHECK(tries[0].error == "the endpoint answered 500");
  CHECK(tries[1].status == 302);
  CHECK(tries[1].error == "the endpoint answered 302: redirects are not followed");
  CHECK(tries[2].delivered);
  CHECK(tries[3].delivered);
  const auto got = receiver.wait_for(4);
  std::vector<std::string> ids;
  for (const auto& one : got) {
    ids.push_back(one.header("webhook-id"));
    CHECK(one.head.find("POST /hook ") == 0);
  }
  CHECK(ids == std::vector<std::string>{"msg_1", "msg_1", "msg_1", "msg_2"});
}

TEST_CASE("410 ends the endpoint: that message is given up, the others are kept") {
  Outbox outbox;
  outbox.add("shift", 1);
  outbox.add("shift", 2);
  outbox.add("engineer", 3);
  Receiver gone({answer(410), answer(200)}), alive({answer(200)});
  auto sender = sender_of(outbox, {endpoint("shift", gone.url()), endpoint("engineer", alive.url())});
  (void)outbox.wait_for(2);
  sender.wake("shift");
  std::this_thread::sleep_for(100ms);
  CHECK(gone.wait_for(1).size() == 1);
  CHECK(sender.ended() == std::vector<std::string>{"shift"});
  CHECK(outbox.next("shift")->id == 2);
  for (const auto& result : outbox.wait_for(2)) CHECK(result.given_up == (result.message == 1));

  sender.resume("shift");
  const auto tries = outbox.wait_for(3);
  REQUIRE(tries.size() == 3);
  CHECK(tries.back().message == 2);
  CHECK(tries.back().delivered);
  CHECK(sender.ended().empty());
}

TEST_CASE("Retry-After is waited for") {
  Outbox outbox;
  outbox.add("shift", 1);
  Receiver receiver({answer(429, "Retry-After: 1\r\n"), answer(200)});
  auto options = quick();
  options.retry.most = 2s;
  auto sender = sender_of(outbox, {endpoint("shift", receiver.url())}, options);
  const auto start = std::chrono::steady_clock::now();
  const auto tries = outbox.wait_for(2);
  REQUIRE(tries.size() == 2);
  CHECK(std::chrono::steady_clock::now() - start > 950ms);
  CHECK(*tries[0].next_due - tries[0].at >= 1s);
  CHECK(tries[1].delivered);
}

TEST_CASE("a receiver that is down at first gets the message once it is up") {
  Outbox outbox;
  int port = 0;
  { port = Receiver({answer(200)}).port(); }
  outbox.add("shift", 1);
  auto sender = sender_of(outbox, {endpoint("shift", "http://127.0.0.1:" + std::to_string(port) + "/hook")});
  const auto down = outbox.wait_for(2);
  REQUIRE(down.size() >= 2);
  CHECK(down[0].status == 0);
  CHECK(down[0].error == "no connection could be made");
  Receiver receiver({answer(200)}, port);
  CHECK(receiver.wait_for(1).size() == 1);
  std::size_t seen = 2;
  while (seen < 2000 && !outbox.wait_for(seen).back().delivered) ++seen;
  CHECK(outbox.wait_for(seen).back().delivered);
}

TEST_CASE("a slow route delays no other") {
  Outbox outbox;
  outbox.add("slow", 1);
  for (int id = 2; id < 22; ++id) outbox.add("shift", id);
  Receiver slow({test::hang()}), receiver({answer(200)});
  auto options = quick();
  options.limits.whole = 10s;
  auto sender = sender_of(outbox, {endpoint("slow", slow.url()), endpoint("shift", receiver.url())}, options);
  const auto tries = outbox.wait_for(20);
  CHECK(tries.size() == 20);
  CHECK(std::none_of(tries.begin(), tries.end(), [](const auto& result) { return result.message == 1; }));
}

TEST_CASE("stop is prompt during a hanging call, which is not recorded; the next start sends it at once") {
  Outbox outbox;
  outbox.add("shift", 1, 0ms, 3);
  {
    Receiver receiver({test::hang()});
    auto options = quick();
    options.limits.whole = 10s;
    auto sender = sender_of(outbox, {endpoint("shift", receiver.url())}, options);
    (void)receiver.wait_for(1);
    const auto start = std::chrono::steady_clock::now();
    sender.stop();
    CHECK(std::chrono::steady_clock::now() - start < 1s);
    sender.stop();
  }
  Receiver receiver({answer(200)});
  auto sender = sender_of(outbox, {endpoint("shift", receiver.url())});
  const auto tries = outbox.wait_for(1);
  REQUIRE(tries.size() == 1);
  CHECK(tries[0].delivered);
}

TEST_CASE("at start what was tried before is due at once, whatever was planned") {
  Outbox outbox;
  outbox.add("shift", 1, 45min, 7);
  Receiver receiver({answer(200)});
  auto sender = sender_of(outbox, {endpoint("shift", receiver.url())});
  CHECK(outbox.wait_for(1).size() == 1);
}

TEST_CASE("a due time far ahead, as after a clock jump, is waited for no longer than the longest wait") {
  Outbox outbox;
  outbox.add("shift", 1, std::chrono::hours(24 * 365));
  Receiver receiver({answer(200)});
  auto options = quick();
  options.longest_wait = 200ms;
  const auto start = std::chrono::steady_clock::now();
  auto sender = sender_of(outbox, {endpoint("shift", receiver.url())}, options);
  CHECK(outbox.wait_for(1).size() == 1);
  CHECK(std::chrono::steady_clock::now() - start >= 200ms);
}

TEST_CASE("a try that could not be stored is stored before anything else is sent") {
  Outbox outbox;
  outbox.add("shift", 1);
  outbox.add("shift", 2);
  outbox.fail_record(4);
  Receiver receiver({answer(200)});
  auto sender = sender_of(outbox, {endpoint("shift", receiver.url())});
  const auto tries = outbox.wait_for(2);
  CHECK(tries.size() == 2);
  CHECK(bodies(receiver.wait_for(2)) == std::vector<std::string>{"{\"n\":1}", "{\"n\":2}"});
  const auto failed = outbox.failed();
  REQUIRE(failed.size() == 4);
  for (const auto& result : failed) {
    CHECK(result.message == 1);
    CHECK(result.at == tries[0].at);
  }
}

TEST_CASE("a journal that cannot be asked is asked again") {
  Outbox outbox;
  outbox.add("shift", 1);
  outbox.fail_next(3);
  Receiver receiver({answer(200)});
  auto sender = sender_of(outbox, {endpoint("shift", receiver.url())});
  CHECK(outbox.wait_for(1).size() == 1);
}

TEST_CASE("a wake sends what was committed; it does not shorten a back-off") {
  Outbox outbox;
  Receiver receiver({answer(200), answer(500), answer(200)});
  auto options = quick();
  options.retry.first = options.retry.most = 300ms;
  auto sender = sender_of(outbox, {endpoint("shift", receiver.url())}, options);
  std::this_thread::sleep_for(50ms);
  outbox.add("shift", 1);
  sender.wake("nobody");
  sender.wake("shift");
  CHECK(outbox.wait_for(1).size() == 1);
  outbox.add("shift", 2);
  sender.wake("shift");
  (void)outbox.wait_for(2);
  const auto failed_at = std::chrono::steady_clock::now();
  for (int i = 0; i < 10; ++i) sender.wake("shift");
  CHECK(outbox.wait_for(3).size() == 3);
  CHECK(std::chrono::steady_clock::now() - failed_at > 250ms);
}

TEST_CASE("a message that cannot be signed is a failed try in words, and no exception leaves the thread") {
  Outbox outbox;
  outbox.add("shift", 1);
  Receiver receiver({answer(200)});
  WebhookSender sender(
      {endpoint("shift", receiver.url())},
      [&](const std::string& route) {
        auto message = outbox.next(route);
        if (message) message->webhook_id = "a.b";
        return message;
      },
      [&](const DeliveryTry& result) { return outbox.record(result); }, quick());
  const auto tries = outbox.wait_for(1);
  REQUIRE_FALSE(tries.empty());
  CHECK(tries[0].status == 0);
  CHECK(tries[0].error.find("could not be sent") != std::string::npos);
}

TEST_CASE("stop is prompt though a try is never confirmed as stored") {
  Outbox outbox;
  outbox.add("shift", 1);
  Receiver receiver({answer(200)});
  std::promise<void> asked, never;
  WebhookSender sender(
      {endpoint("shift", receiver.url())}, [&](const std::string& route) { return outbox.next(route); },
      [&](const DeliveryTry&) {
        asked.set_value();
        return never.get_future();
      },
      quick());
  asked.get_future().wait();
  const auto start = std::chrono::steady_clock::now();
  sender.stop();
  CHECK(std::chrono::steady_clock::now() - start < 1s);
}
