#pragma once
// Where the monitor gets the past of a stream when something late, taken back or forgotten makes it fold
// again.
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/event.hpp"
#include "core/base/index.hpp"

namespace agreed {

/// All answers hold what stands now: nothing taken back, nothing censored, rows of the batch in hand
/// included.
class History {
 public:
  virtual ~History() = default;
  /// The chart's readings in fold order.
  [[nodiscard]] virtual std::vector<CheckReading> checks(ChartIndex chart) = 0;
  /// The comparison's split readings of both analyzers, those of one sample side by side, otherwise in any
  /// order.
  [[nodiscard]] virtual std::vector<SplitReading> splits(ComparisonIndex comparison) = 0;
  /// Those of one sample.
  [[nodiscard]] virtual std::vector<SplitReading> splits_of(ComparisonIndex comparison,
                                                            std::string_view sample) = 0;
  /// All interventions in fold order.
  [[nodiscard]] virtual std::vector<Intervention> interventions() = 0;
};

}  // namespace agreed
