#pragma once
// What did not come: check standards and split samples that are overdue, analyzers that fell silent. Pure:
// when results came and the time now go in, findings come out.
//
// Something with a cadence (`every`) is overdue when nothing of it came for `patience` times that, hours of
// rest left out, counted from the newest that came (by our clock) or from the start of the service. An
// analyzer from which nothing at all came for its shortest cadence is silent: one alert (`results_silent`)
// says so, and what is overdue because of it is not told besides.
#include <map>
#include <optional>
#include <span>
#include <utility>
#include <vector>

#include "core/alert/quiet_hours.hpp"
#include "core/base/event.hpp"
#include "core/base/finding.hpp"
#include "core/base/settings.hpp"

namespace agreed {

/// When something came last.
struct LastCame {
  Instant at{};       ///< by our clock
  bool came = false;  ///< false: nothing yet, `at` is the start of the service
};

class Arrivals {
 public:
  Arrivals(const Settings& settings, Instant start);
  /// Those of `before`, kept under `then`, under other settings: what has the same id came when it did; what
  /// is new counts from `start`.
  Arrivals(const Settings& settings, Instant start, const Arrivals& before, const Settings& then);
  /// A reading was taken in at `now`.
  void add(const Event& event, Instant now);
  /// A pair of this comparison was made at `now`.
  void add_pair(ComparisonIndex comparison, Instant now);

  [[nodiscard]] LastCame analyzer(AnalyzerIndex index) const { return analyzers_.at(index.value); }
  [[nodiscard]] LastCame comparison(ComparisonIndex index) const { return comparisons_.at(index.value); }
  [[nodiscard]] LastCame standard(AnalyzerIndex analyzer, StandardIndex standard) const;

 private:
  Instant start_;
  std::vector<LastCame> analyzers_, comparisons_;
  std::map<std::pair<AnalyzerIndex, StandardIndex>, LastCame> standards_;
};

struct OverduePolicy {
  double patience = 1.5;  ///< times the cadence
  std::vector<QuietHours> quiet;
};

/// Whether anything of this kind can be found overdue about the subject: false once it, or its cadence, is no
/// longer configured.
[[nodiscard]] bool has_cadence(const Settings& settings, AlertKind kind, const Subject& subject);

/// Of every subject with a cadence: what is overdue holds, what came again has ceased, and of what is
/// neither there is nothing.
[[nodiscard]] std::vector<Finding> overdue_findings(const Settings& settings, const OverduePolicy& policy,
                                                    const Arrivals& arrivals, Instant now);

}  // namespace agreed
