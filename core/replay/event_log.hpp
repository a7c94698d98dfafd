#pragma once
// A history held in memory, of which only the beginning is known yet: what a replay folds, and what the
// monitor asks when something makes a stream fold again.
#include <cstddef>
#include <memory>
#include <string_view>
#include <unordered_map>
#include <vector>

#include "core/base/settings.hpp"
#include "core/monitor/history.hpp"

namespace agreed {

class EventLog final : public History {
 public:
  /// Puts the events into the fold order. Each key (analyzer, kind, item, measurand, time, replicate) must be
  /// there once. Readings that no chart and no comparison takes stay in the log and are given to nobody.
  EventLog(std::shared_ptr<const Settings> settings, std::vector<Event> events);

  [[nodiscard]] const std::vector<Event>& events() const { return events_; }
  /// From now on the first so many events are known; never fewer than before.
  void know(std::size_t first) { known_ = first; }

  std::vector<CheckReading> checks(ChartIndex chart) override;
  std::vector<SplitReading> splits(ComparisonIndex comparison) override;
  std::vector<SplitReading> splits_of(ComparisonIndex comparison, std::string_view sample) override;
  std::vector<Intervention> interventions() override;

 private:
  std::shared_ptr<const Settings> settings_;
  std::vector<Event> events_;
  std::size_t known_ = 0;
  /// Made when first asked for: where in the log the results of each sample are.
  std::unordered_map<std::string_view, std::vector<std::size_t>> by_sample_;
};

}  // namespace agreed
