#pragma once
// What the monitor, or the intake, concludes: pure data. A finding says that a condition holds (again, or
// worse) or that it has ceased; the alert book makes alerts of findings.
#include <optional>
#include <string>
#include <utility>
#include <variant>
#include <vector>

#include "core/base/index.hpp"
#include "core/base/instant.hpp"

namespace agreed {

enum class AlertKind {
  check_standard_unstable,
  check_standard_biased,
  agreement_lost,
  agreement_drifting,
  agreement_unproven,
  sample_scatter,
  pair_outlier,
  check_overdue,
  pairs_overdue,
  results_silent,
  file_rejected,
  readings_conflict,
  unpaired_samples,
  inbox_unreachable,
  storage_low,
  delivery_failing,
};

enum class Severity { notice, warning, critical };

[[nodiscard]] const char* to_string(AlertKind kind);
[[nodiscard]] const char* to_string(Severity severity);
/// In the order of the enumeration.
[[nodiscard]] std::vector<AlertKind> all_alert_kinds();
[[nodiscard]] std::optional<AlertKind> alert_kind_from(const std::string& name);
[[nodiscard]] std::optional<Severity> severity_from(const std::string& name);

/// Whom or what an alert is about, by ids; the parts that its kind has, the others empty.
struct Subject {
  std::string analyzer{}, standard{}, measurand{}, comparison{}, service{};
  auto operator<=>(const Subject&) const = default;
};

/// A value in the details of a finding.
using Detail = std::variant<double, std::string, std::vector<std::string>>;
using Details = std::vector<std::pair<std::string, Detail>>;

struct Period {
  Instant first, last;
  bool operator==(const Period&) const = default;
};

struct Finding {
  AlertKind kind{};
  Subject subject{};
  bool holds = true;  ///< false: the condition has ceased
  Severity severity = Severity::warning;
  Instant at{};  ///< measured_at of the reading, or the time of the happening, that led to it
  std::optional<Instant> started_at{};
  std::optional<Period> started_between{};
  std::string resolved_reason{};  ///< why it ceased, when it has
  Details details{};              ///< numbers and words for the text; see alert/wording
};

}  // namespace agreed
