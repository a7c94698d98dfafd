#pragma once
// The monitor's view of the past up to a time, read through a read-only connection.
#include <vector>

#include "core/base/settings.hpp"
#include "core/monitor/history.hpp"
#include "daemon/journal/journal.hpp"

namespace agreed {

class ReaderHistory final : public History {
 public:
  /// Both outlive this. Knows what was measured (done) before `until`.
  ReaderHistory(JournalReader& reader, const Settings& settings, Instant until)
      : reader_(reader), settings_(settings), until_(until) {}

  void know_until(Instant until) { until_ = until; }

  std::vector<CheckReading> checks(ChartIndex chart) override;
  std::vector<SplitReading> splits(ComparisonIndex comparison) override;
  std::vector<SplitReading> splits_of(ComparisonIndex comparison, std::string_view sample) override;
  std::vector<Intervention> interventions() override;

  /// Everything from `from` on, in fold order.
  [[nodiscard]] std::vector<Event> events_from(Instant from);

 private:
  void add_splits(AnalyzerIndex analyzer, MeasurandIndex measurand, std::vector<SplitReading>& rows);

  JournalReader& reader_;
  const Settings& settings_;
  Instant until_;
};

}  // namespace agreed
