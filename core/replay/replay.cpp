#include "core/replay/replay.hpp"

#include <algorithm>
#include <chrono>
#include <utility>

namespace agreed {
namespace {

constexpr Duration kTogether = std::chrono::minutes(1);
// Time by time the service looks at the clock; to a minute is fine enough for what is told in hours.
constexpr Duration kLookEvery = std::chrono::minutes(1);

/// Reminders are the book's, not the configuration's answer to old readings.
AlertPolicy without_reminders(AlertPolicy policy) {
  policy.remind_every = Duration::zero();
  return policy;
}

Instant first_of(const std::vector<Event>& events) {
  return events.empty() ? Instant{} : time_of(events.front());
}

}  // namespace

Replay::Replay(std::shared_ptr<const Settings> settings, AlertPolicy policy, std::vector<Event> events,
               std::vector<PastAcknowledgement> acknowledgements)
    : settings_(std::move(settings)),
      policy_(without_reminders(std::move(policy))),
      log_(settings_, std::move(events)),
      monitor_(settings_),
      book_(policy_, settings_, {}),
      arrivals_(*settings_, first_of(log_.events())),
      lonely_(*settings_),
      acknowledgements_(std::move(acknowledgements)),
      watched_at_(first_of(log_.events())) {}

bool Replay::step() {
  std::vector<Event> batch = next_batch();
  if (batch.empty()) return false;
  const Instant first = time_of(batch.front()), last = time_of(batch.back());
  watch_until(first);
  note(batch);
  conclude(std::move(batch), last);
  // What came again has ceased at once, as in a service that looks after each batch.
  if (anything_missing_ || last - watched_at_ >= kLookEvery) watch_at(last);
  return true;
}

std::vector<Event> Replay::next_batch() {
  const auto& events = log_.events();
  if (next_ == events.size()) return {};
  const auto begin = events.begin() + static_cast<std::ptrdiff_t>(next_);
  const Instant until = time_of(*begin) + kTogether;
  const auto end =
      std::find_if(begin, events.end(), [&](const Event& event) { return time_of(event) >= until; });
  next_ = static_cast<std::size_t>(end - events.begin());
  log_.know(next_);
  return {begin, end};
}

void Replay::note(const std::vector<Event>& batch) {
  for (const Event& event : batch) {
    arrivals_.add(event, time_of(event));
    if (const auto* split = std::get_if<SplitReading>(&event)) lonely_.add(*split, split->measured_at);
    if (const auto* intervention = std::get_if<Intervention>(&event)) book_.hold(*intervention);
  }
}

void Replay::conclude(std::vector<Event> batch, Instant now) {
  const MonitorOutcome outcome = monitor_.apply(std::move(batch), log_);
  const AfterFold after(*settings_, monitor_, book_);
  const auto tell = [this](const std::vector<AlertTransition>& transitions) { keep(transitions); };
  for (Finding finding : outcome.findings) {
    acknowledge_until(finding.at);
    after.explain(finding);
    tell(book_.apply(finding, finding.at));
  }
  acknowledge_until(now);
  if (const auto subjects = after.refolded(outcome); !subjects.empty())
    after.reconcile(outcome, subjects, "late_data", now, true, tell);
  for (const ComparisonIndex comparison : monitor_.explained_anew(outcome))
    after.tell_anew(comparison, now, tell);
  for (const ComparisonIndex comparison : outcome.comparisons_paired) arrivals_.add_pair(comparison, now);
  lonely_.settle(lacks_partner());
}

// While nothing comes, what is overdue stays so: if nothing new is told at the end of a pause, nothing was in
// it, and else its moment is found by halving. Only then every minute need not be looked at.
void Replay::watch_until(Instant now) {
  while (now - watched_at_ >= kLookEvery && anything_new(now)) {
    std::int64_t before = 0, at = (now - watched_at_) / kLookEvery;
    if (!anything_new(watched_at_ + at * kLookEvery)) break;  // only in the last part of a minute
    while (at - before > 1) {
      const std::int64_t middle = before + (at - before) / 2;
      (anything_new(watched_at_ + middle * kLookEvery) ? at : before) = middle;
    }
    watch_at(watched_at_ + at * kLookEvery);
  }
  if (now - watched_at_ < kLookEvery) return;
  watched_at_ = now;
  keep(book_.tick(now));
}

bool Replay::anything_new(Instant now) {
  if (next_acknowledgement_ < acknowledgements_.size() && acknowledgements_[next_acknowledgement_].at <= now)
    return true;
  if (lonely_.any_due(now)) return true;
  for (const Finding& finding : overdue_findings(*settings_, policy_.overdue, arrivals_, now))
    if (finding.holds != (book_.find_current(finding.kind, finding.subject) != nullptr)) return true;
  return false;
}

LonelyHalves::LacksPartner Replay::lacks_partner() const {
  return [this](ComparisonIndex comparison, const SplitReading& result) {
    return monitor_.lacks_partner(comparison, result);
  };
}

void Replay::watch_at(Instant now) {
  watched_at_ = now;
  acknowledge_until(now);
  for (const Finding& finding : lonely_.due(now, lacks_partner())) keep(book_.apply(finding, now));
  anything_missing_ = false;
  for (const Finding& finding : overdue_findings(*settings_, policy_.overdue, arrivals_, now)) {
    anything_missing_ = anything_missing_ || finding.holds;
    keep(book_.apply(finding, now));
  }
  keep(book_.tick(now));
}

void Replay::acknowledge_until(Instant now) {
  for (;
       next_acknowledgement_ < acknowledgements_.size() && acknowledgements_[next_acknowledgement_].at <= now;
       ++next_acknowledgement_) {
    const PastAcknowledgement& past = acknowledgements_[next_acknowledgement_];
    if (const Alert* open = book_.find_current(past.kind, past.subject))
      keep(book_.acknowledge(open->id, past.by, "", past.at));
  }
}

void Replay::keep(std::vector<AlertTransition> transitions) {
  std::move(transitions.begin(), transitions.end(), std::back_inserter(transitions_));
}

}  // namespace agreed
