#pragma once
// The book of alerts: one alert per (kind, subject). Pure: findings, acknowledgements and the time in,
// transitions out; whoever holds it stores and sends them.
#include <map>
#include <memory>
#include <span>
#include <string_view>
#include <vector>

#include "core/alert/alert.hpp"
#include "core/base/settings.hpp"

namespace agreed {

struct AlertPolicy {
  Duration remind_every = std::chrono::hours(8);
  Duration reopen_within = std::chrono::hours(24);
};

class AlertBook {
 public:
  /// `restored`: every alert as its last transition left it; ids go on from the largest.
  AlertBook(AlertPolicy policy, std::shared_ptr<const Settings> settings, std::vector<Alert> restored);

  /// A finding that holds opens, reopens (resolved less than reopen_within ago: same id), raises or adds to
  /// the alert of its (kind, subject); one that has ceased resolves it. Kinds that resolve on acknowledgement
  /// collect `files`, `items` or `samples` in their details.
  [[nodiscard]] std::vector<AlertTransition> apply(const Finding& finding, Instant now);

  /// After a fold: `conditions` is all that holds now. Opens what has no open alert, resolves with `reason`
  /// what no longer holds; alerts of kinds that are not the monitor's, and kinds that resolve on
  /// acknowledgement, are left alone. `streams`: only alerts of these subjects are compared; empty = all.
  [[nodiscard]] std::vector<AlertTransition> reconcile(std::span<const Finding> conditions,
                                                       std::span<const Subject> streams,
                                                       std::string_view reason, Instant now);

  /// Resolves the pair_outlier alert of a comparison if none of its samples is still set aside (reason
  /// `late_data`).
  [[nodiscard]] std::vector<AlertTransition> admit_outliers(const std::string& comparison,
                                                            std::span<const std::string> still_set_aside,
                                                            Instant now);

  /// Throws std::out_of_range for an unknown id and std::logic_error for one that is resolved already.
  [[nodiscard]] std::vector<AlertTransition> acknowledge(std::int64_t id, const std::string& by,
                                                         const std::string& note, Instant now);

  /// Reminders of open alerts that nobody acknowledged.
  [[nodiscard]] std::vector<AlertTransition> tick(Instant now);

  /// Open and acknowledged alerts, by id.
  [[nodiscard]] std::vector<const Alert*> current() const;

 private:
  AlertPolicy policy_;
  std::shared_ptr<const Settings> settings_;
  std::map<std::int64_t, Alert> alerts_;
  std::int64_t next_id_ = 1;
};

}  // namespace agreed
