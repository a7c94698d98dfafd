#pragma once
// An alert: a condition that a person must know of, with a life (open, acknowledged, resolved).
#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <string_view>

#include "core/base/finding.hpp"
#include "core/base/instant.hpp"

namespace agreed {

enum class AlertState { open, acknowledged, resolved };
enum class AlertChange { opened, changed, acknowledged, resolved, reminder };
[[nodiscard]] const char* to_string(AlertState state);
[[nodiscard]] const char* to_string(AlertChange change);
[[nodiscard]] std::optional<AlertState> alert_state_from(std::string_view name);

struct Acknowledgement {
  std::string by;
  Instant at;
  std::string note;
  bool operator==(const Acknowledgement&) const = default;
};

struct Alert {
  std::int64_t id = 0;
  AlertKind kind{};
  Subject subject;
  Severity severity = Severity::warning;
  AlertState state = AlertState::open;
  std::string title, text;
  Instant opened_at{}, changed_at{};  ///< our clock (in replay: measured_at)
  std::optional<Instant> resolved_at;
  std::string resolved_reason;
  std::optional<Acknowledgement> acknowledged;
  std::optional<Instant> started_at;
  std::optional<Period> started_between;
  Details details;
  Instant told_at{};  ///< when it was last told (opened, worse, reminder): reminders count from here
  std::optional<AlertChange> held;  ///< what has still to be told, once its analyzer is no longer worked on

  bool operator==(const Alert&) const = default;
};

/// As the book keeps it: never written to, replaced when it changes, so that whoever looks at it may keep it.
using SharedAlert = std::shared_ptr<const Alert>;

/// One step in an alert's life, and the alert as it stands after it. `tell`: it goes to the routes (a further
/// finding added to an open alert does not).
struct AlertTransition {
  AlertChange change{};
  Instant at{};
  bool tell = true;
  Alert alert;
};

}  // namespace agreed
