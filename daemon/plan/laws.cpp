#include "daemon/plan/laws.hpp"

#include <cmath>

#include "core/pair/error_ratio.hpp"

namespace agreed::plan {
namespace {

// Rounding to a tenth of an sd adds less than a thousandth to the variance.
constexpr double kFineResolution = 0.1;

/// Without anything that is in the measurand's unit.
void take_unit_away(Measurand& measurand) {
  measurand.decimals.reset();
  measurand.decision_levels.clear();
  measurand.allowable.reset();
}

bool same(const ClassicalSettings& a, const ClassicalSettings& b) {
  return a.run_spread == b.run_spread && a.ewma_weight == b.ewma_weight && a.ewma_width == b.ewma_width &&
         a.cusum_allowance == b.cusum_allowance && a.cusum_limit == b.cusum_limit &&
         a.run_rules == b.run_rules;
}

bool nearly(double a, double b) {
  return std::abs(a - b) <= 1e-9 * std::abs(a);
}

}  // namespace

LawModel law_model(const Settings& settings, ChartIndex chart, std::optional<double> sd) {
  LawModel model{settings, chart, 1, true};
  const ChartSettings& of = settings.of(chart);
  const Measurand& measurand = settings.of(of.measurand);
  const bool fine = !measurand.decimals || !sd || std::pow(10, -*measurand.decimals) <= kFineResolution * *sd;
  const bool own_limits = of.classical.center || of.classical.sigma;
  if (sd && (!fine || own_limits)) {
    model.sd = *sd;
    model.in_sds = false;
    return model;
  }
  model.settings.charts[chart.value].classical.center.reset();
  model.settings.charts[chart.value].classical.sigma.reset();
  model.settings.charts[chart.value].smallest_shift.reset();
  take_unit_away(model.settings.measurands[of.measurand.value]);
  return model;
}

bool same_law(const LawModel& a, const LawModel& b) {
  if (!a.in_sds || !b.in_sds) return false;
  const ChartSettings &one = a.settings.of(a.chart), &other = b.settings.of(b.chart);
  return one.method == other.method && nearly(one.level_run_length, other.level_run_length) &&
         nearly(one.precision_run_length, other.precision_run_length) && one.baseline == other.baseline &&
         one.split_memory == other.split_memory && one.clear_after == other.clear_after &&
         one.every == other.every && same(one.classical, other.classical);
}

UnitPairs unit_pairs(const Settings& settings, ComparisonIndex comparison) {
  Settings without = settings;
  ComparisonSettings& of = without.comparisons[comparison.value];
  take_unit_away(without.measurands[of.measurand.value]);
  if (of.relation) of.relation = EstablishedLine{};
  of.error_growth = ErrorGrowth::constant;
  ErrorRatioSettings lambda{.source = ErrorSource::given_lambda, .lambda = 1};
  if (of.error_ratio.source == ErrorSource::given_lambda) lambda.lambda = of.error_ratio.lambda;
  const ErrorRatio ratio = given_ratio(lambda);
  const double sd_y = 1 / std::sqrt(1 + ratio.lambda);
  constexpr double kRange = 50;  // in sds of a pair: no worry to the fit
  return {std::move(without),
          {SampleValues::evenly(0, kRange), sd_y * std::sqrt(ratio.lambda), sd_y, ratio, 1, 1}};
}

}  // namespace agreed::plan
