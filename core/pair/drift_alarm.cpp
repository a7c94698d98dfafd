#include "core/pair/drift_alarm.hpp"

#include <algorithm>

namespace agreed {
namespace {
constexpr double kHysteresis = 0.9;  // a warning is given up this far below its limit
constexpr int kLeastPairsOfWarning = 3;
}  // namespace

DriftAlarm::DriftAlarm(DriftLimits limits)
    : limits_(limits),
      warning_(evidence_of_score(limits.warning)),
      critical_(evidence_of_score(limits.critical)),
      still_confirmed_(evidence_of_score(std::max(0.0, limits.warning - kHysteresis))) {}

std::optional<double> DriftAlarm::evidence(const PairChart& chart, const Deltas& deltas) {
  std::optional<double> least;
  for (const double delta : deltas) {
    const auto found = chart.evidence(delta);
    if (!found) return std::nullopt;
    least = least ? std::min(*least, *found) : *found;
  }
  return least;
}

DriftAlarm::Step DriftAlarm::step(const PairChart& chart, const Deltas& deltas) {
  if (open_) ++pairs_since_;
  const auto at_lambda = chart.evidence(deltas[0]);
  if (!at_lambda) return Step::nothing;
  // The smallest of the three is no larger than this one, so most pairs need but one scan.
  double evidence_now = *at_lambda;
  const double of_interest = open_ == Severity::warning    ? still_confirmed_
                             : open_ == Severity::critical ? critical_
                                                           : warning_;
  if (evidence_now > of_interest) evidence_now = evidence(chart, deltas).value_or(0);

  const bool critical = evidence_now > critical_;
  if (critical || (!open_ && evidence_now > warning_)) {
    open_ = critical ? Severity::critical : Severity::warning;
    pairs_since_ = 0;
    split_ = chart.best_split(deltas[0]).value_or(Split{});
    return critical ? Step::critical : Step::warning;
  }
  if (open_ == Severity::warning && pairs_since_ >= kLeastPairsOfWarning && evidence_now < still_confirmed_) {
    open_.reset();
    return Step::not_confirmed;
  }
  return Step::nothing;
}

}  // namespace agreed
