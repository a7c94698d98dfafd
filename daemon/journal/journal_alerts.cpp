// Findings, alert transitions, the outbox and configuration versions.
#include <algorithm>
#include <array>

#include "daemon/journal/journal_impl.hpp"

namespace agreed {
namespace {

using journal::Query;
using journal::Store;
using journal::Table;

constexpr std::array<std::string_view, 3> kStates = {"open", "acknowledged", "resolved"};

bool is_state(std::string_view text) {
  return std::find(kStates.begin(), kStates.end(), text) != kStates.end();
}

std::string state_in_body(Store& store, std::string_view body) {
  Query row = store.query("SELECT CASE WHEN json_valid(?1) THEN json_extract(?1, '$.state') END");
  row->bind(1, std::string(body));
  row->executeStep();
  return row->getColumn(0).getString();
}

/// The state the alert is in after the transition: what its body says, else what the change implies; a change
/// or a reminder implies nothing new.
std::string state_after(Store& store, const StoredTransition& transition) {
  std::string state = state_in_body(store, transition.body);
  if (is_state(state)) return state;
  if (transition.change == "opened") return "open";
  if (is_state(transition.change)) return transition.change;
  Query row = store.query("SELECT state FROM alert_transitions WHERE alert = ? ORDER BY id DESC LIMIT 1");
  row->bind(1, transition.alert);
  return row->executeStep() ? row->getColumn(0).getString() : "open";
}

void put_in_outbox(Store& store, std::int64_t id, const OutboxMessage& message) {
  Query row = store.query("INSERT INTO outbox VALUES(?, ?, 'waiting', ?, 0)");
  row->bind(1, id);
  row->bind(2, message.route);
  row->bind(3, journal::milliseconds(message.due_at));
  row->exec();
}

void note_try(Store& store, const DeliveryTry& attempt) {
  Query row = store.query(
      "UPDATE outbox SET state = ?2, tries = tries + 1, due_at = coalesce(?3, due_at) WHERE message = ?1");
  row->bind(1, attempt.message);
  row->bind(2, attempt.delivered ? "delivered" : attempt.given_up ? "undeliverable" : "waiting");
  if (attempt.next_due)
    row->bind(3, journal::milliseconds(*attempt.next_due));
  else
    row->bind(3);
  row->exec();
}

struct FoundMessage {
  std::int64_t id = 0;
  AskedAgain asked;
};

FoundMessage message_of(Store& store, std::string_view webhook_id) {
  Query row = store.query(
      "SELECT m.id, m.route, o.state = 'waiting' FROM messages m JOIN outbox o ON o.message = m.id "
      "WHERE m.webhook_id = ?");
  row->bind(1, std::string(webhook_id));
  if (!row->executeStep()) return {0, {SendAgain::unknown, ""}};
  const bool waits = row->getColumn(2).getInt() != 0;
  return {row->getColumn(0).getInt64(),
          {waits ? SendAgain::waits_already : SendAgain::queued, row->getColumn(1).getString()}};
}

}  // namespace

void Journal::add_finding(Instant at, std::string_view kind, std::string_view subject,
                          std::string_view body) {
  impl_->in_open_batch(
      [&] { impl_->history.start(Table::findings).time(at).text(kind).text(subject).text(body).insert(); });
}

void Journal::add_transition(const StoredTransition& transition) {
  impl_->in_open_batch([&] {
    const std::string state = state_after(*impl_, transition);
    impl_->history.start(Table::alert_transitions)
        .integer(transition.alert)
        .time(transition.at)
        .text(transition.change)
        .text(state)
        .text(transition.body)
        .insert();
  });
}

std::int64_t Journal::add_message(const OutboxMessage& message) {
  return impl_->in_open_batch([&] {
    const std::int64_t id = impl_->history.start(Table::messages)
                                .text(message.webhook_id)
                                .text(message.route)
                                .text(message.type)
                                .text(message.body)
                                .integer(message.alert)
                                .time(message.created_at)
                                .time(message.due_at)
                                .insert()
                                .value();
    put_in_outbox(*impl_, id, message);
    return id;
  });
}

void Journal::add_try(const DeliveryTry& attempt) {
  impl_->in_open_batch([&] {
    std::optional<std::int64_t> next;
    if (attempt.next_due) next = journal::milliseconds(*attempt.next_due);
    impl_->history.start(Table::delivery_tries)
        .integer(attempt.message)
        .time(attempt.at)
        .integer(attempt.status)
        .text(attempt.error)
        .integer(attempt.delivered ? 1 : 0)
        .integer(attempt.given_up ? 1 : 0)
        .optional_integer(next)
        .insert();
    note_try(*impl_, attempt);
  });
}

AskedAgain Journal::ask_again(std::string_view webhook_id) {
  return journal::translating(impl_->file, [&] { return message_of(*impl_, webhook_id).asked; });
}

AskedAgain Journal::send_again(std::string_view webhook_id, Instant due_at) {
  return impl_->in_open_batch([&] {
    FoundMessage message = message_of(*impl_, webhook_id);
    if (message.asked.answer != SendAgain::queued) return std::move(message.asked);
    impl_->history.start(Table::resends).integer(message.id).time(due_at).insert();
    Query row =
        impl_->query("UPDATE outbox SET state = 'waiting', due_at = ?2, tries = 0 WHERE message = ?1");
    row->bind(1, message.id);
    row->bind(2, journal::milliseconds(due_at));
    row->exec();
    return std::move(message.asked);
  });
}

bool Journal::has_message(std::int64_t alert, std::string_view route, Instant since) {
  return journal::translating(impl_->file, [&] {
    Query row = impl_->query("SELECT 1 FROM messages WHERE alert = ? AND route = ? AND created_at >= ?");
    row->bind(1, alert);
    row->bind(2, std::string(route));
    row->bind(3, journal::milliseconds(since));
    return row->executeStep();
  });
}

std::optional<LastMessage> Journal::last_message(std::string_view route, std::string_view type) {
  return journal::translating(impl_->file, [&]() -> std::optional<LastMessage> {
    Query row = impl_->query(
        "SELECT m.created_at, o.state = 'waiting' FROM messages m JOIN outbox o ON o.message = m.id "
        "WHERE m.alert = 0 AND m.route = ? AND m.type = ? ORDER BY m.id DESC LIMIT 1");
    row->bind(1, std::string(route));
    row->bind(2, std::string(type));
    if (!row->executeStep()) return std::nullopt;
    return LastMessage{journal::instant(row->getColumn(0)), row->getColumn(1).getInt() != 0};
  });
}

std::optional<FailingDelivery> Journal::failing(std::string_view route) {
  return journal::translating(impl_->file, [&]() -> std::optional<FailingDelivery> {
    // The newest try tells what the endpoint answers now; the oldest message tried in vain, since when. A
    // route that is not among the newest thousand tries of all has nothing to do.
    Query newest = impl_->query(
        "SELECT t.delivered, t.status, m.created_at FROM (SELECT * FROM delivery_tries ORDER BY id DESC "
        "LIMIT "
        "1000) t JOIN messages m ON m.id = t.message WHERE m.route = ? ORDER BY t.id DESC LIMIT 1");
    newest->bind(1, std::string(route));
    if (!newest->executeStep() || newest->getColumn(0).getInt() != 0) return std::nullopt;
    FailingDelivery failing{journal::instant(newest->getColumn(2)), newest->getColumn(1).getInt()};
    Query oldest = impl_->query(
        "SELECT m.created_at FROM outbox o JOIN messages m ON m.id = o.message WHERE o.route = ? AND "
        "o.state = 'waiting' AND o.tries > 0 ORDER BY o.message LIMIT 1");
    oldest->bind(1, std::string(route));
    if (oldest->executeStep())
      failing.since = std::min(failing.since, journal::instant(oldest->getColumn(0)));
    return failing;
  });
}

void Journal::add_configuration(std::string_view text, std::string_view sha256, Instant at) {
  impl_->in_open_batch(
      [&] { impl_->history.start(Table::configurations).time(at).text(sha256).text(text).insert(); });
}

std::string Journal::last_configuration_sha256() {
  return journal::translating(impl_->file, [&]() -> std::string {
    Query row = impl_->query("SELECT sha256 FROM configurations ORDER BY id DESC LIMIT 1");
    return row->executeStep() ? row->getColumn(0).getString() : "";
  });
}

std::optional<Instant> Journal::last_configuration_since() {
  return journal::translating(impl_->file, [&]() -> std::optional<Instant> {
    Query row = impl_->query(
        "SELECT min(at) FROM configurations WHERE id > (SELECT coalesce(max(id), 0) FROM configurations "
        "WHERE sha256 <> (SELECT sha256 FROM configurations ORDER BY id DESC LIMIT 1))");
    if (!row->executeStep() || row->isColumnNull(0)) return std::nullopt;
    return journal::instant(row->getColumn(0));
  });
}

}  // namespace agreed
