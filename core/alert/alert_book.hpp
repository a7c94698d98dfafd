#pragma once
// The book of alerts: one alert per (kind, subject). Pure: findings, acknowledgements and the time in,
// transitions out; whoever holds it stores and sends them.
#include <functional>
#include <map>
#include <memory>
#include <span>
#include <string_view>
#include <vector>

#include "core/alert/alert.hpp"
#include "core/alert/holds.hpp"
#include "core/alert/overdue.hpp"
#include "core/base/settings.hpp"

namespace agreed {

struct AlertPolicy {
  Duration remind_every = std::chrono::hours(8);
  Duration reopen_within = std::chrono::hours(24);
  Duration hold = std::chrono::hours(1);  ///< after an intervention
  std::vector<Maintenance> maintenance;
  OverduePolicy overdue;
};

class AlertBook {
 public:
  /// `restored`: every alert as its last transition left it; ids go on from the largest. Resolved ones are
  /// kept only as long as they can reopen.
  AlertBook(AlertPolicy policy, std::shared_ptr<const Settings> settings, std::vector<Alert> restored);

  /// A finding that holds opens, reopens (resolved less than reopen_within ago: same id), raises or adds to
  /// the alert of its (kind, subject); one that has ceased resolves it. Kinds that resolve on acknowledgement
  /// collect `files`, `items` or `samples` in their details (see collected.hpp). What changes an alert
  /// without making it worse is a `changed` that is not told; what changes nothing gives no transition. A
  /// reopened alert begins anew: severity, details, opened_at, nobody has acknowledged it.
  [[nodiscard]] std::vector<AlertTransition> apply(const Finding& finding, Instant now);

  /// After a fold: `conditions` is all that holds now. Opens what has no open alert, resolves with `reason`
  /// what no longer holds; alerts of kinds that are not the monitor's, and kinds that resolve on
  /// acknowledgement, are left alone. What still holds is brought up to date as by apply, unless nothing is
  /// `news` (a restart: an alert must read the same as if there had been none). `streams`: only alerts of
  /// these subjects are compared; empty = all.
  [[nodiscard]] std::vector<AlertTransition> reconcile(std::span<const Finding> conditions,
                                                       std::span<const Subject> streams,
                                                       std::string_view reason, Instant now,
                                                       bool news = true);

  /// After a change of the configuration: resolves with `reason` the alerts of what is no longer watched.
  /// Only kinds that the clock, the disk and the endpoints open are asked for: the others are for reconcile,
  /// or for whoever acknowledges them.
  [[nodiscard]] std::vector<AlertTransition> drop_unwatched(
      const std::function<bool(AlertKind, const Subject&)>& watched, std::string_view reason, Instant now);

  /// Resolves the pair_outlier alert of a comparison if none of its samples is still set aside (reason
  /// `late_data`).
  [[nodiscard]] std::vector<AlertTransition> admit_outliers(const std::string& comparison,
                                                            std::span<const std::string> still_set_aside,
                                                            Instant now);

  /// Throws std::out_of_range for an id never given and std::logic_error for one that is resolved already.
  /// The first acknowledgement stands: a second one gives no transition. Kinds that resolve on
  /// acknowledgement give two: acknowledged, then resolved with reason `acknowledged`.
  [[nodiscard]] std::vector<AlertTransition> acknowledge(std::int64_t id, const std::string& by,
                                                         const std::string& note, Instant now);

  /// Alerts of the analyzer are not told for a while; see Holds.
  void hold(const Intervention& intervention) { holds_.add(intervention); }

  /// What was held and may now be told; reminders of open alerts that nobody acknowledged (none when
  /// remind_every is zero).
  [[nodiscard]] std::vector<AlertTransition> tick(Instant now);

  /// The open or acknowledged alert of that kind and subject, if there is one.
  [[nodiscard]] const Alert* find_current(AlertKind kind, const Subject& subject) const;
  /// Open and acknowledged alerts, by id.
  [[nodiscard]] std::vector<SharedAlert> current() const;

 private:
  [[nodiscard]] SharedAlert* edit_current(AlertKind kind, const Subject& subject);
  [[nodiscard]] Alert blank_for(const Finding& finding);
  [[nodiscard]] bool held(const Alert& alert, Instant now) const {
    return holds_.held(alert.subject, *settings_, now);
  }
  AlertTransition open(const Finding& finding, Instant now);
  std::optional<AlertTransition> remind(SharedAlert& alert, Instant now) const;
  std::vector<AlertTransition> add(SharedAlert& alert, const Finding& finding, Instant now);
  AlertTransition resolve(SharedAlert& alert, std::string_view reason, Instant now);
  void forget_what_cannot_reopen(Instant now);

  AlertPolicy policy_;
  std::shared_ptr<const Settings> settings_;
  Holds holds_;
  std::map<std::int64_t, SharedAlert> alerts_;
  std::int64_t next_id_ = 1;
};

}  // namespace agreed
