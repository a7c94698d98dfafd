#include "core/alert/alert_book.hpp"

#include <algorithm>
#include <stdexcept>
#include <string>
#include <utility>

#include "core/alert/collected.hpp"
#include "core/alert/details.hpp"
#include "core/alert/wording.hpp"

namespace agreed {
namespace {

bool is_current(const SharedAlert& alert) {
  return alert->state != AlertState::resolved;
}

/// Puts the changed alert in place of the one before, and tells of it.
AlertTransition replace(SharedAlert& alert, Alert&& after, AlertChange change, Instant now, bool tell) {
  alert = std::make_shared<const Alert>(std::move(after));
  return {change, now, tell, *alert};
}

/// Kinds whose condition the monitor folds; the others come from the intake, the clock or the service itself.
bool folded_by_the_monitor(AlertKind kind) {
  switch (kind) {
    case AlertKind::check_standard_unstable:
    case AlertKind::check_standard_biased:
    case AlertKind::agreement_lost:
    case AlertKind::agreement_drifting:
    case AlertKind::agreement_unproven:
    case AlertKind::sample_scatter:
      return true;
    default:
      return false;
  }
}

/// What a finding says of an alert. A start that is not stated this time leaves the earlier estimate.
void take_over(Alert& alert, const Finding& finding) {
  if (finding.started_at) alert.started_at = finding.started_at;
  if (finding.started_between) alert.started_between = finding.started_between;
  alert.details = resolves_on_acknowledgement(alert.kind)
                      ? collect(alert.kind, alert.details, finding.details)
                      : finding.details;
}

}  // namespace

AlertBook::AlertBook(AlertPolicy policy, std::shared_ptr<const Settings> settings,
                     std::vector<Alert> restored)
    : policy_(std::move(policy)), settings_(std::move(settings)), holds_(policy_.maintenance, policy_.hold) {
  if (!settings_) throw std::invalid_argument("AlertBook: settings must not be null");
  for (auto& alert : restored) {
    next_id_ = std::max(next_id_, alert.id + 1);
    const auto id = alert.id;
    alerts_.insert_or_assign(id, std::make_shared<const Alert>(std::move(alert)));
  }
}

std::vector<AlertTransition> AlertBook::apply(const Finding& finding, Instant now) {
  forget_what_cannot_reopen(now);
  SharedAlert* alert = edit_current(finding.kind, finding.subject);
  if (alert == nullptr) {
    if (!finding.holds) return {};
    return {open(finding, now)};
  }
  if (!finding.holds) return {resolve(*alert, finding.resolved_reason, now)};
  return add(*alert, finding, now);
}

std::vector<AlertTransition> AlertBook::reconcile(std::span<const Finding> conditions,
                                                  std::span<const Subject> streams, std::string_view reason,
                                                  Instant now, bool news) {
  const auto compared = [&](AlertKind kind, const Subject& subject) {
    return folded_by_the_monitor(kind) &&
           (streams.empty() || std::find(streams.begin(), streams.end(), subject) != streams.end());
  };
  std::vector<AlertTransition> transitions;
  for (auto& [id, alert] : alerts_) {
    if (!is_current(alert) || !compared(alert->kind, alert->subject)) continue;
    const bool still_holds =
        std::any_of(conditions.begin(), conditions.end(), [&alert = alert](const Finding& finding) {
          return finding.holds && finding.kind == alert->kind && finding.subject == alert->subject;
        });
    if (!still_holds) transitions.push_back(resolve(alert, reason, now));
  }
  for (const auto& finding : conditions) {
    if (!finding.holds || !compared(finding.kind, finding.subject)) continue;
    if (!news && find_current(finding.kind, finding.subject) != nullptr) continue;
    for (auto& transition : apply(finding, now)) transitions.push_back(std::move(transition));
  }
  return transitions;
}

std::vector<AlertTransition> AlertBook::drop_unwatched(
    const std::function<bool(AlertKind, const Subject&)>& watched, std::string_view reason, Instant now) {
  std::vector<AlertTransition> transitions;
  for (auto& [id, alert] : alerts_) {
    if (!is_current(alert) || folded_by_the_monitor(alert->kind) || resolves_on_acknowledgement(alert->kind))
      continue;
    if (!watched(alert->kind, alert->subject)) transitions.push_back(resolve(alert, reason, now));
  }
  return transitions;
}

std::vector<AlertTransition> AlertBook::admit_outliers(const std::string& comparison,
                                                       std::span<const std::string> still_set_aside,
                                                       Instant now) {
  Subject subject;
  subject.comparison = comparison;
  SharedAlert* alert = edit_current(AlertKind::pair_outlier, subject);
  if (alert == nullptr) return {};
  const auto samples = list_in((*alert)->details, collected_list((*alert)->kind));
  const bool one_stays = std::any_of(samples.begin(), samples.end(), [&](const std::string& sample) {
    return std::find(still_set_aside.begin(), still_set_aside.end(), sample) != still_set_aside.end();
  });
  // Without names nothing can be said to be admitted.
  if (samples.empty() || one_stays) return {};
  return {resolve(*alert, "late_data", now)};
}

std::vector<AlertTransition> AlertBook::acknowledge(std::int64_t id, const std::string& by,
                                                    const std::string& note, Instant now) {
  if (id < 1 || id >= next_id_) throw std::out_of_range("there is no alert " + std::to_string(id));
  const auto found = alerts_.find(id);
  if (found == alerts_.end() || !is_current(found->second))
    throw std::logic_error("alert " + std::to_string(id) + " is resolved already");
  SharedAlert& alert = found->second;
  if (alert->state == AlertState::acknowledged) return {};

  Alert after = *alert;
  after.state = AlertState::acknowledged;
  after.acknowledged = Acknowledgement{by, now, note};
  after.changed_at = now;
  const bool told = std::exchange(after.held, std::nullopt) != AlertChange::opened;
  write_words(after, *settings_);
  std::vector<AlertTransition> transitions{
      replace(alert, std::move(after), AlertChange::acknowledged, now, told)};
  if (resolves_on_acknowledgement(alert->kind)) {
    transitions.push_back(resolve(alert, "acknowledged", now));
    transitions.back().tell = told;
  }
  return transitions;
}

std::vector<AlertTransition> AlertBook::tick(Instant now) {
  forget_what_cannot_reopen(now);
  std::vector<AlertTransition> transitions;
  for (auto& [id, alert] : alerts_) {
    if (alert->state != AlertState::open || held(*alert, now)) continue;
    if (auto transition = remind(alert, now)) transitions.push_back(std::move(*transition));
  }
  return transitions;
}

/// What was held is told now, and what nobody acknowledged again after a while.
std::optional<AlertTransition> AlertBook::remind(SharedAlert& alert, Instant now) const {
  const AlertChange change = alert->held.value_or(AlertChange::reminder);
  if (!alert->held) {
    if (policy_.remind_every <= Duration::zero()) return std::nullopt;
    // A told_at far ahead of now: our clock was set back. Remind, rather than stay silent until it catches
    // up.
    const Duration since = now - alert->told_at;
    if (since < policy_.remind_every && -since <= policy_.remind_every) return std::nullopt;
  }
  Alert after = *alert;
  after.held.reset();
  after.told_at = now;
  return replace(alert, std::move(after), change, now, true);
}

std::vector<SharedAlert> AlertBook::current() const {
  std::vector<SharedAlert> list;
  for (const auto& [id, alert] : alerts_)
    if (is_current(alert)) list.push_back(alert);
  return list;
}

const Alert* AlertBook::find_current(AlertKind kind, const Subject& subject) const {
  for (const auto& [id, alert] : alerts_)
    if (alert->kind == kind && is_current(alert) && alert->subject == subject) return alert.get();
  return nullptr;
}

SharedAlert* AlertBook::edit_current(AlertKind kind, const Subject& subject) {
  const Alert* found = find_current(kind, subject);
  return found == nullptr ? nullptr : &alerts_.at(found->id);
}

/// A blank alert for the finding: under the id of the newest resolved one that may reopen, else a new one.
Alert AlertBook::blank_for(const Finding& finding) {
  std::int64_t id = 0;
  for (const auto& [known, alert] : alerts_)
    if (alert->kind == finding.kind && alert->subject == finding.subject) id = known;
  if (id == 0) id = next_id_++;
  Alert blank;
  blank.id = id;
  blank.kind = finding.kind;
  blank.subject = finding.subject;
  return blank;
}

AlertTransition AlertBook::open(const Finding& finding, Instant now) {
  Alert alert = blank_for(finding);
  alert.severity = finding.severity;
  alert.opened_at = alert.changed_at = alert.told_at = now;
  if (held(alert, now)) alert.held = AlertChange::opened;
  take_over(alert, finding);
  write_words(alert, *settings_);
  const bool tell = !alert.held;
  SharedAlert& place = alerts_[alert.id];
  return replace(place, std::move(alert), AlertChange::opened, now, tell);
}

std::vector<AlertTransition> AlertBook::add(SharedAlert& alert, const Finding& finding, Instant now) {
  Alert after = *alert;
  after.severity = std::max(alert->severity, finding.severity);
  take_over(after, finding);
  write_words(after, *settings_);
  if (after == *alert) return {};
  const bool worse = after.severity > alert->severity;
  after.changed_at = now;
  AlertChange change = AlertChange::changed;
  const bool tell = worse && !held(*alert, now);
  if (tell) {
    change = std::exchange(after.held, std::nullopt).value_or(change);
    after.told_at = now;
  } else if (worse && !after.held) {
    after.held = change;
  }
  return {replace(alert, std::move(after), change, now, tell)};
}

AlertTransition AlertBook::resolve(SharedAlert& alert, std::string_view reason, Instant now) {
  Alert after = *alert;
  after.state = AlertState::resolved;
  after.resolved_at = now;
  after.resolved_reason = reason;
  after.changed_at = now;
  // Whoever never heard of it need not hear that it is over.
  const bool told = std::exchange(after.held, std::nullopt) != AlertChange::opened;
  write_words(after, *settings_);
  return replace(alert, std::move(after), AlertChange::resolved, now, told);
}

void AlertBook::forget_what_cannot_reopen(Instant now) {
  std::erase_if(alerts_, [&](const auto& entry) {
    const SharedAlert& alert = entry.second;
    return !is_current(alert) &&
           now - alert->resolved_at.value_or(alert->changed_at) >= policy_.reopen_within;
  });
}

}  // namespace agreed
