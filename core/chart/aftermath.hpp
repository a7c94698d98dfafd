#pragma once
// After a signal: is the change still there, has it ended, or was it never confirmed? (3-statistics 3.2,
// "After it".) The start at the signal stays fixed here. At each later reading the readings since the start
// may fall into a deviating part and a return to what was before.
#include <cstddef>
#include <vector>

#include "core/chart/stretch.hpp"

namespace agreed {

/// A score this far below its limit no longer confirms what it told.
inline constexpr double kConfirmedWithin = 0.9;

/// Which rule ends the alert: that of a shift (or single reading) or that of scatter.
enum class EndingRule { level, precision };

struct AftermathLimits {
  int clear_after = 3;  ///< readings after the deviating part
  double level_limit = 0, precision_limit = 0;
  double level_run_length = 0, precision_run_length = 0;
};

enum class Outcome { stays, ends, ends_setting_aside, becomes_scatter };

struct Aftermath {
  Outcome outcome = Outcome::stays;
  std::size_t position = 0;  ///< last reading to set aside, or the split at which the scatter starts
};

/// `start`: the stretch up to the estimated start at the signal.
[[nodiscard]] Aftermath judge_aftermath(const Stretch& stretch, const Prefix& start, EndingRule rule,
                                        const AftermathLimits& limits, std::vector<float>& scratch);

}  // namespace agreed
