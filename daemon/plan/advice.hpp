#pragma once
// From what a simulation found to what to write into the configuration. Each advice stands alone: followed as
// it is, with all else unchanged, it meets the wish, and the configuration stays valid. Pure.
#include <optional>
#include <string>
#include <vector>

#include "core/base/settings.hpp"
#include "core/plan/notice.hpp"
#include "core/plan/wished_budget.hpp"

namespace agreed::plan {

/// Either a chart or a comparison.
struct Stream {
  std::optional<ChartIndex> chart;
  std::optional<ComparisonIndex> comparison;
};
/// "line1/wheat-low/protein", or the comparison's id.
[[nodiscard]] std::string name_of(const Settings& settings, const Stream& stream);
[[nodiscard]] Duration every_of(const Settings& settings, const Stream& stream);

/// One line of the configuration.
struct SettingChange {
  std::string key;    ///< "check_standards.wheat-low.every"
  std::string value;  ///< to be written
  std::string now;    ///< what holds now; empty: nothing is written there
};

struct Advice {
  std::string kind;  ///< every, in_control_run_length, false_alerts_per_year or repeatability
  std::vector<SettingChange> changes{};  ///< all of them together; empty for repeatability
  std::optional<double> sd_factor{};     ///< repeatability: what the sd is to be multiplied by
  std::optional<Simulated> share{};      ///< noticed in the time wished, then
  double false_alerts_per_year = 0;      ///< of the whole service, then
  double demand = 0;                     ///< larger: asks more, among those of one kind and the same keys
  bool many_false_alerts = false;        ///< a run length below 1,000, of which `agreed check` warns
};

/// What would make a stream notice, what costs least first.
[[nodiscard]] std::vector<Advice> advice_on_notice(const Settings& settings, const Stream& stream,
                                                   const Notice& notice);

/// What would bring the false alerts down to the wish; empty: nothing that one setting can do.
[[nodiscard]] std::vector<Advice> advice_on_budget(const Settings& settings, const WishedBudget& budget);

/// Three significant digits, not above `value` > 0.
[[nodiscard]] double rounded_down(double value);
/// Three significant digits, not below it.
[[nodiscard]] double rounded_up(double value);

}  // namespace agreed::plan
