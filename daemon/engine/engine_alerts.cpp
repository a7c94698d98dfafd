// What is found goes into the alert book, and what that says to the routes: all within the open batch.
#include <algorithm>

#include "daemon/engine/engine.hpp"
#include "daemon/engine/journal_history.hpp"
#include "daemon/engine/service_watch.hpp"
#include "daemon/render/alert_json.hpp"
#include "daemon/render/finding_json.hpp"
#include "daemon/render/status_json.hpp"
#include "daemon/webhook/cloud_event.hpp"
#include "daemon/webhook/routing.hpp"

namespace agreed {
namespace {

// Between two looks at the clock, the disk and the endpoints, while batches follow each other.
constexpr Duration kLookEvery = std::chrono::seconds(1);
constexpr const char* kHeartbeat = "agreed.heartbeat";

}  // namespace

void Engine::record(const Finding& finding) {
  journal_->add_finding(finding.at, to_string(finding.kind), subject_json(finding.subject),
                        finding_json(finding));
}

// What the clock, the disk and the endpoints say. A condition that goes on is told once.
void Engine::watch(Instant now) {
  if (now >= watched_at_ && now - watched_at_ < kLookEvery) return;
  watched_at_ = now;
  std::vector<Finding> findings = overdue_findings(*settings_, alert_policy_.overdue, arrivals_, now);
  for (Finding& finding : inbox_findings(*settings_, inboxes_, queue_.inboxes(), now))
    findings.push_back(std::move(finding));
  if (const auto room = room_for(state_folder_))
    if (auto finding = storage_finding(state_folder_, *room, least_free_mb_, now))
      findings.push_back(std::move(*finding));
  for (const Route& route : routes_)
    if (auto finding = delivery_finding(route, journal_->failing(route.name), now))
      findings.push_back(std::move(*finding));
  for (const Finding& finding : findings) {
    const auto transitions = book_->apply(finding, now);
    if (transitions.empty()) continue;
    record(finding);
    tell(transitions, now);
  }
  tell(book_->tick(now), now);
  tell_unacknowledged(now);
  beat(now);
}

LonelyHalves::LacksPartner Engine::lacks_partner() const {
  return [this](ComparisonIndex comparison, const SplitReading& result) {
    return monitor_.lacks_partner(comparison, result);
  };
}

void Engine::tell_lonely(Instant now) {
  for (const Finding& finding : lonely_.due(now, lacks_partner())) {
    record(finding);
    tell(book_->apply(finding, now), now);
  }
}

void Engine::tell_unacknowledged(Instant now) {
  const auto current = book_->current();
  for (const Escalation& due : escalations(current, routes_, *settings_, now)) {
    const Alert& alert = *due.alert;
    const std::string& route = routes_[due.route].name;
    if (!escalated_.insert({alert.id, alert.opened_at, due.route}).second) continue;
    if (journal_->has_message(alert.id, route, alert.opened_at)) continue;
    send(route, {AlertChange::opened, now, true, alert}, alert_json(alert, base_url_, config_sha256_), now);
  }
}

// While the newest sign of life still waits to be delivered, another would say nothing more.
void Engine::beat(Instant now) {
  for (const Route& route : routes_) {
    if (!route.heartbeat) continue;
    const auto last = journal_->last_message(route.name, kHeartbeat);
    if (last && (last->waits || (last->created_at <= now && now - last->created_at < *route.heartbeat)))
      continue;
    const std::string id = make_webhook_id();
    put_in_outbox(
        route.name, id, kHeartbeat,
        to_json(heartbeat_event(journal_->source(), id, settings_->site, chain_json(journal_->head()), now)),
        0, now);
  }
}

AfterFold Engine::after_fold() const {
  return {*settings_, monitor_, *book_};
}

void Engine::reconcile(const MonitorOutcome& outcome, const std::vector<Subject>& subjects,
                       const std::string& reason, Instant now, bool news) {
  after_fold().reconcile(outcome, subjects, reason, now, news,
                         [&](const std::vector<AlertTransition>& transitions) { tell(transitions, now); });
}

void Engine::release_what_is_unwatched(Instant now) {
  const auto watched = [this](AlertKind kind, const Subject& subject) {
    switch (kind) {
      case AlertKind::check_overdue:
      case AlertKind::pairs_overdue:
      case AlertKind::results_silent:
        return has_cadence(*settings_, kind, subject);
      case AlertKind::inbox_unreachable:
        return std::any_of(settings_->analyzers.begin(), settings_->analyzers.end(),
                           [&](const Analyzer& analyzer) { return analyzer.id == subject.analyzer; });
      case AlertKind::delivery_failing:
        return std::any_of(routes_.begin(), routes_.end(),
                           [&](const Route& route) { return route.name == subject.service; });
      default:
        return true;
    }
  };
  tell(book_->drop_unwatched(watched, "configuration_changed", now), now);
}

void Engine::tell(const std::vector<AlertTransition>& transitions, Instant now) {
  for (const AlertTransition& transition : transitions) {
    const std::string body = alert_json(transition.alert, base_url_, config_sha256_);
    journal_->add_transition({transition.alert.id, transition.at, to_string(transition.change), body});
    if (!transition.tell) continue;
    for (const std::size_t position : routes_for(transition, routes_, *settings_))
      send(routes_[position].name, transition, body, now);
  }
}

void Engine::send(const std::string& route, const AlertTransition& transition, const std::string& body,
                  Instant now) {
  const std::string id = make_webhook_id();
  put_in_outbox(route, id, event_type(transition.change),
                to_json(alert_event(transition, journal_->source(), id, body)), transition.alert.id, now);
}

void Engine::put_in_outbox(const std::string& route, const std::string& id, std::string type,
                           std::string body, std::int64_t alert, Instant now) {
  OutboxMessage message;
  message.webhook_id = id;
  message.route = route;
  message.type = std::move(type);
  message.body = std::move(body);
  message.alert = alert;
  message.created_at = message.due_at = now;
  journal_->add_message(message);
  routes_with_news_.insert(route);
}

}  // namespace agreed
