#include "core/diagnosis/diagnosis.hpp"

#include <array>
#include <cmath>

#include "core/diagnosis/diagnosis_words.hpp"

namespace agreed {
namespace {
constexpr std::array<int, 9> kMoreReadings = {1, 2, 3, 5, 10, 15, 20, 30, 50};

double resolution_of(const Measurand& measurand) {
  return measurand.decimals ? std::pow(10.0, -*measurand.decimals) : 0.0;
}

bool decides(const ShiftEstimates& shifts, const CheckShift& x, const CheckShift& y,
             const ExpectedChecks& expected, const MoreReadings& more) {
  ShiftEstimates then = shifts;
  if (more.on_x > 0) then.x = after_more_readings(x, more.on_x, expected.x);
  if (more.on_y > 0) then.y = after_more_readings(y, more.on_y, expected.y);
  return attribute(then).largest() >= claim_from;
}

void show_checks(const CheckShift& checks, std::optional<double>& shift, std::optional<double>& se,
                 int& before, int& after) {
  before = checks.before;
  after = checks.after;
  if (!checks.shift) return;
  shift = checks.shift->value;
  se = checks.shift->se;
}
}  // namespace

std::optional<MoreReadings> readings_to_decide(const ShiftEstimates& shifts, const CheckShift& x,
                                               const CheckShift& y) {
  const ExpectedChecks expected = expected_checks(shifts, attribute(shifts).most_probable());
  for (const int more : kMoreReadings)
    for (const MoreReadings& readings :
         {MoreReadings{more, 0}, MoreReadings{0, more}, MoreReadings{more, more}}) {
      if ((readings.on_x > 0 && !x.sd) || (readings.on_y > 0 && !y.sd)) continue;
      if (decides(shifts, x, y, expected, readings)) return readings;
    }
  return std::nullopt;
}

DiagnosisView diagnose(const ComparisonChange& change, const CheckShift& x, const CheckShift& y,
                       const Settings& settings, ComparisonIndex comparison) {
  const DiagnosisWords words(settings, comparison);
  DiagnosisView view;
  view.probabilities.fill(0.25);
  view.probability = 0.25;
  if (!change.split) {
    view.evidence = words.no_moment();
    return view;
  }
  const PairSplit& split = *change.split;
  view.started_at = split.started_at;
  view.started_between = split.started_between;
  view.pairs_before = split.before.n;
  view.pairs_after = split.after.n;
  show_checks(x, view.shift_x, view.se_x, view.x_readings_before, view.x_readings_after);
  show_checks(y, view.shift_y, view.se_y, view.y_readings_before, view.y_readings_after);
  const double resolution = resolution_of(settings.of(settings.of(comparison).measurand));
  auto pairs = pair_shift(split.before, split.after, split.delta, resolution);
  const auto& established = settings.of(comparison).relation;
  if (!pairs && established) pairs = shift_from_line(*established, split.after, resolution);
  if (!pairs) {
    view.evidence = words.too_few_pairs(view);
    return view;
  }
  view.shift_pairs = pairs->shift.value;
  view.se_pairs = pairs->shift.se;
  const ShiftEstimates shifts{pairs->shift, x.shift, y.shift, pairs->slope};
  const Attribution attribution = attribute(shifts);
  view.probabilities = attribution.probability;
  view.probability = attribution.largest();
  if (view.probability >= claim_from) view.moved = attribution.most_probable();
  view.evidence = view.moved == Moved::undecided
                      ? words.undecided(view, attribution.most_probable(), readings_to_decide(shifts, x, y))
                      : words.decided(view);
  return view;
}

}  // namespace agreed
