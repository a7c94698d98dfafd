#pragma once
// What is to be expected of each chart and comparison: as given, else as configured, else as seen. Where
// none of these tells it, that is said and nothing is guessed but what is stated here.
//
// Own choices, no source: an sd is taken from a chart with at least 5 degrees of freedom; the samples'
// values and the scatter of the pairs about their line from a window of at least 20 pairs. Then the errors
// of both analyzers are scaled until they explain that scatter: it is what intervals and charts rest on. An
// sd that was given is taken as it is.
#include <optional>
#include <string>

#include "core/base/settings.hpp"
#include "core/plan/pair_conditions.hpp"
#include "daemon/plan/plan_wishes.hpp"
#include "daemon/plan/seen.hpp"

namespace agreed::plan {

enum class Source { unknown, given, configured, seen };
[[nodiscard]] const char* to_string(Source source);

struct ExpectedSd {
  Source source = Source::unknown;
  double value = 0;               ///< > 0 unless unknown; in the measurand's unit
  double degrees_of_freedom = 0;  ///< behind one that was seen
};

/// sd of one point of a chart.
[[nodiscard]] ExpectedSd expected_sd(const Settings& settings, ChartIndex chart, const Wishes& wishes,
                                     const Seen& seen);

struct ExpectedPairs {
  ExpectedSd x, y;                           ///< of single results
  bool scatter_seen = false;                 ///< both were scaled to the scatter that was seen
  bool samples_seen = false;                 ///< else they are assumed, around the decision levels
  std::optional<PairConditions> conditions;  ///< none: an sd is not known
  std::string missing;                       ///< what is not known then: "line1/protein", or both
};
[[nodiscard]] ExpectedPairs expected_pairs(const Settings& settings, ComparisonIndex comparison,
                                           const Wishes& wishes, const Seen& seen);

}  // namespace agreed::plan
