#pragma once
// Old readings through the present configuration in virtual time: the same monitor and the same alert book as
// the service, with measured_at as the clock.
//
// Every reading counts as received when it was measured. So nothing is ever late, and what the service told
// because a file came late is not repeated. Readings taken back are not among the events; they were never
// there. Events within a minute of each other are one batch; what they led to is told at the moment of the
// reading that led to it, so batches change no time. What the clock tells (overdue, silent, halves without a
// partner) is looked for after each batch and, where nothing came for longer, at every whole minute in
// between.
#include <cstddef>
#include <cstdint>
#include <memory>
#include <vector>

#include "core/alert/after_fold.hpp"
#include "core/alert/alert_book.hpp"
#include "core/alert/lonely_halves.hpp"
#include "core/monitor/monitor.hpp"
#include "core/replay/event_log.hpp"

namespace agreed {

/// Somebody acknowledged the alert of that kind and subject then: what only ends by that, ends in a replay
/// too.
struct PastAcknowledgement {
  Instant at;
  AlertKind kind{};
  Subject subject;
  std::string by;
};

class Replay {
 public:
  /// `acknowledgements` in the order of their times.
  Replay(std::shared_ptr<const Settings> settings, AlertPolicy policy, std::vector<Event> events,
         std::vector<PastAcknowledgement> acknowledgements);

  /// Folds the next batch; false when there is none.
  bool step();

  [[nodiscard]] std::size_t events() const { return log_.events().size(); }
  [[nodiscard]] std::size_t folded() const { return next_; }
  /// Every step in the life of an alert, in order, with the alert as it stood after it. Reminders are left
  /// out.
  [[nodiscard]] const std::vector<AlertTransition>& transitions() const { return transitions_; }

 private:
  [[nodiscard]] std::vector<Event> next_batch();
  void note(const std::vector<Event>& batch);
  void conclude(std::vector<Event> batch, Instant now);
  /// What the clock tells up to and including `now`.
  void watch_until(Instant now);
  void watch_at(Instant now);
  [[nodiscard]] bool anything_new(Instant now);
  [[nodiscard]] LonelyHalves::LacksPartner lacks_partner() const;
  void acknowledge_until(Instant now);
  void keep(std::vector<AlertTransition> transitions);

  std::shared_ptr<const Settings> settings_;
  AlertPolicy policy_;
  EventLog log_;
  Monitor monitor_;
  AlertBook book_;
  Arrivals arrivals_;
  LonelyHalves lonely_;
  std::vector<PastAcknowledgement> acknowledgements_;
  std::size_t next_ = 0, next_acknowledgement_ = 0;
  Instant watched_at_{};
  bool anything_missing_ = false;  ///< something was overdue at the last look
  std::vector<AlertTransition> transitions_;
};

}  // namespace agreed
