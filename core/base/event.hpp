#pragma once
// What happens to the monitor: readings and interventions, in one order that does not depend on how they
// arrived.
#include <compare>
#include <cstdint>
#include <optional>
#include <string>
#include <variant>

#include "core/base/index.hpp"
#include "core/base/instant.hpp"

namespace agreed {

/// One result of a check standard. Censored results never get here.
struct CheckReading {
  Instant measured_at;
  AnalyzerIndex analyzer;
  StandardIndex standard;
  MeasurandIndex measurand;
  std::int32_t replicate = 0;
  double value = 0;  ///< in the measurand's unit, finite
};

/// One analyzer's result of a split sample.
struct SplitReading {
  Instant measured_at;
  AnalyzerIndex analyzer;
  std::string sample;
  MeasurandIndex measurand;
  std::int32_t replicate = 0;
  double value = 0;
};

enum class InterventionKind : std::uint8_t {
  recalibrated,
  repaired,
  consumable_changed,
  level_accepted,
  noted
};

/// Anything done to an analyzer that may move it. Without a measurand it concerns all of the analyzer's.
struct Intervention {
  Instant at;
  AnalyzerIndex analyzer;
  std::optional<StandardIndex> standard;
  std::optional<MeasurandIndex> measurand;
  InterventionKind kind = InterventionKind::noted;
  std::string note;

  /// True for the kinds that begin a new stretch of the analyzer's charts and comparisons.
  [[nodiscard]] bool restarts() const {
    return kind == InterventionKind::recalibrated || kind == InterventionKind::repaired ||
           kind == InterventionKind::consumable_changed;
  }
};

using Event = std::variant<CheckReading, SplitReading, Intervention>;

[[nodiscard]] inline bool is_reading(const Event& event) {
  return !std::holds_alternative<Intervention>(event);
}

/// When it was measured or done.
[[nodiscard]] Instant time_of(const Event& event);

/// The fold order: time, then interventions before readings (what was done at a moment holds for what was
/// measured at it), analyzer, checks before splits, item, measurand, replicate.
[[nodiscard]] bool happens_before(const Event& a, const Event& b);

}  // namespace agreed
