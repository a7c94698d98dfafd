#pragma once
// The monitor's view of the past, read from the journal.
#include <functional>
#include <memory>

#include "core/base/settings.hpp"
#include "core/monitor/history.hpp"
#include "daemon/intake/pulse.hpp"
#include "daemon/journal/journal.hpp"

namespace agreed {

class JournalHistory final : public History {
 public:
  /// All outlive this. `pulse` steps at every row, so that a long history is not taken for one that hangs.
  JournalHistory(Journal& journal, const Settings& settings, Pulse* pulse = nullptr)
      : journal_(journal), settings_(settings), pulse_(pulse) {}

  std::vector<CheckReading> checks(ChartIndex chart) override;
  std::vector<SplitReading> splits(ComparisonIndex comparison) override;
  std::vector<SplitReading> splits_of(ComparisonIndex comparison, std::string_view sample) override;
  std::vector<Intervention> interventions() override;

  /// Gives each result of a split sample taken in after `since`, and when it was; without its value.
  void each_split_received(Instant since,
                           const std::function<void(const SplitReading&, Instant received)>& take);

 private:
  void step() const {
    if (pulse_ != nullptr) pulse_->step();
  }

  Journal& journal_;
  const Settings& settings_;
  Pulse* const pulse_;
};

/// The kind of an intervention by its name; nothing for an unknown one.
[[nodiscard]] std::optional<InterventionKind> intervention_kind_from(std::string_view name);
[[nodiscard]] const char* to_string(InterventionKind kind);

/// An intervention by the present settings; nothing if it concerns an analyzer that is no longer configured.
[[nodiscard]] std::optional<Intervention> intervention_from(const JournalIntervention& stored,
                                                            const Settings& settings);

}  // namespace agreed
