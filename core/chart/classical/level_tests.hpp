#pragma once
// What a classical chart asks of the level of each run, one after the other: the limits, and the EWMA, the
// cumulative sum and the run rules as far as they were chosen.
#include "core/chart/classical/cusum.hpp"
#include "core/chart/classical/ewma.hpp"
#include "core/chart/classical/run_rules.hpp"
#include "core/chart/classical/signals.hpp"

namespace agreed::classical {

struct LevelTests {
  Ewma ewma;
  Cusum cusum;
  RunRuleMemory rules;

  struct Result {
    Signals signals;
    int readings = 1;  ///< with this one, since the change that they tell began
  };

  /// z: the run mean less the centre line, in its own standard deviations.
  Result take(double z, const ClassicalSettings& chosen);
};

}  // namespace agreed::classical
