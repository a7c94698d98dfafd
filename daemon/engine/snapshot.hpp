#pragma once
// What the outside sees between two batches: immutable, shared by readers, replaced whole by the engine.
#include <cstdint>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "core/alert/alert.hpp"
#include "core/alert/overdue.hpp"
#include "core/base/instant.hpp"
#include "core/base/settings.hpp"
#include "core/chart/chart_view.hpp"
#include "core/pair/comparison_view.hpp"
#include "daemon/engine/lazy_view.hpp"
#include "daemon/intake/sink.hpp"
#include "daemon/journal/journal.hpp"

namespace agreed {

struct AnalyzerStatus {
  InboxState inbox;
  std::optional<Instant> last_reading_at;  ///< measured_at of its newest accepted reading
};

struct Snapshot {
  Instant at{};
  Instant started_at{};
  std::string config_sha256;
  std::optional<Instant> config_since;  ///< nothing until the journal has it
  bool started = false;                 ///< the first fold and the first scans are done
  bool ready = false;                   ///< and results can be taken in
  std::vector<std::string> not_ready;   ///< why not, in words
  std::vector<std::string> remarks;     ///< what is wrong although it is ready, in words
  std::shared_ptr<const Settings> settings;
  std::vector<std::string> routes;  ///< configured, by name
  OverduePolicy overdue;            ///< when something with a cadence counts as overdue
  IntakeTotals totals;
  std::uint64_t pending_files = 0;
  std::vector<AnalyzerStatus> analyzers;              ///< by AnalyzerIndex
  std::vector<LazyView<ChartView>> charts;            ///< by ChartIndex
  std::vector<ChartState> chart_states;               ///< by ChartIndex, without looking at the view
  std::vector<LazyView<ComparisonView>> comparisons;  ///< by ComparisonIndex
  std::vector<SharedAlert> alerts;                    ///< open and acknowledged
  int alerts_open = 0, alerts_acknowledged = 0, alerts_critical = 0;  ///< critical: those open
  std::map<std::string, int> alerts_of_comparison;  ///< open and acknowledged, by comparison id
  ChainHead chain;
};

}  // namespace agreed
