// What people and the senders ask of the engine: each is a task of a batch, answered once that is committed.
#include <algorithm>

#include "daemon/clock.hpp"
#include "daemon/engine/engine.hpp"

namespace agreed {
namespace {
constexpr const char* kStopping =
    "the service is stopping, or changing its configuration; ask again in a moment";
}

std::future<AskAnswer> Engine::ask(std::function<void(AskAnswer&, Instant)> inside,
                                   std::function<void(const AskAnswer&)> after) {
  auto answer = std::make_shared<AskAnswer>();
  Task task;
  task.inside = [inside = std::move(inside), answer](Instant now) { inside(*answer, now); };
  return answered(std::move(task), answer, std::move(after));
}

std::future<AskAnswer> Engine::answered(Task task, const std::shared_ptr<AskAnswer>& answer,
                                        std::function<void(const AskAnswer&)> after) {
  auto promise = std::make_shared<std::promise<AskAnswer>>();
  auto future = promise->get_future();
  task.after = [promise, answer, after = std::move(after)](const std::string& failure) {
    if (!failure.empty()) *answer = {AskOutcome::unavailable, failure};
    after(*answer);
    promise->set_value(*answer);
  };
  if (!queue_.put(std::move(task))) promise->set_value({AskOutcome::unavailable, kStopping});
  return future;
}

std::future<AskAnswer> Engine::acknowledge(std::int64_t alert, std::string by, std::string note) {
  return ask([this, alert, by = std::move(by), note = std::move(note)](AskAnswer& answer, Instant now) {
    try {
      tell(book_->acknowledge(alert, by, note, now), now);
    } catch (const std::out_of_range&) {
      answer = {AskOutcome::not_found, "There is no alert " + std::to_string(alert) + "."};
    } catch (const std::logic_error& error) {
      answer = {AskOutcome::not_possible, error.what()};
    }
  });
}

std::future<AskAnswer> Engine::resend(std::string message) {
  return ask([this, message = std::move(message)](AskAnswer& answer,
                                                  Instant now) { answer = send_again(message, now); },
             [this](const AskAnswer& answer) {
               if (answer.outcome == AskOutcome::done) resume_sender_(answer.words);
             });
}

std::future<AskAnswer> Engine::intervene(ToldIntervention told) {
  auto read = interventions_.read(told, now_utc());
  if (const auto* fault = std::get_if<FieldFault>(&read)) {
    std::promise<AskAnswer> at_once;
    at_once.set_value({AskOutcome::not_usable, fault->reason, std::string(fault->field)});
    return at_once.get_future();
  }
  auto answer = std::make_shared<AskAnswer>();
  Task task;
  task.take_in = [this, row = std::get<Row>(std::move(read)), answer](TakenIn& taken) {
    *answer = take_told(row, taken);
  };
  return answered(std::move(task), answer, [](const AskAnswer&) {});
}

AskAnswer Engine::take_told(const Row& row, TakenIn& taken) {
  KeptIntervention kept = ledger_.take_told(row, *journal_, taken);
  AskAnswer answer;
  if (!kept.is_new) {
    const JournalIntervention& stands = kept.stored;
    answer.outcome = AskOutcome::done_before;
    if (stands.by != row.by || stands.note != row.note)
      return {AskOutcome::not_possible, "The same intervention is known already, told by \"" + stands.by +
                                            "\" with the note \"" + stands.note + "\", and stands."};
  }
  answer.intervention = std::move(kept.stored);
  return answer;
}

AskAnswer Engine::send_again(const std::string& message, Instant now) {
  const AskedAgain asked = journal_->ask_again(message);
  if (asked.answer == SendAgain::unknown)
    return {AskOutcome::not_found, "There is no message " + message + "."};
  if (asked.answer == SendAgain::waits_already)
    return {AskOutcome::not_possible,
            "The message waits to be sent to route " + asked.route + " anyway; its deliveries tell when."};
  if (std::none_of(routes_.begin(), routes_.end(),
                   [&](const Route& route) { return route.name == asked.route; }))
    return {AskOutcome::not_possible,
            "The message's route " + asked.route + " is not in the configuration any more."};
  journal_->send_again(message, now);
  return {AskOutcome::done, asked.route};
}

std::future<void> Engine::record(DeliveryTry attempt) {
  auto promise = std::make_shared<std::promise<void>>();
  auto future = promise->get_future();
  Task task;
  task.inside = [this, attempt = std::move(attempt)](Instant) { journal_->add_try(attempt); };
  task.after = [promise](const std::string& failure) {
    if (failure.empty()) return promise->set_value();
    promise->set_exception(std::make_exception_ptr(std::runtime_error(failure)));
  };
  if (!queue_.put(std::move(task)))
    promise->set_exception(std::make_exception_ptr(std::runtime_error("the service is stopping")));
  return future;
}

}  // namespace agreed
