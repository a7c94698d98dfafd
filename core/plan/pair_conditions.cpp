#include "core/plan/pair_conditions.hpp"

#include <cmath>
#include <stdexcept>

namespace agreed::plan {
namespace {
/// By what the sd at a level differs from that at the samples' mean value.
double growth(const ErrorModel& model, double mean, double level) {
  if (model.growth == ErrorGrowth::constant) return 1;
  return std::sqrt(model.variance_at(level) / model.variance_at(mean));
}

bool positive(double value) {
  return std::isfinite(value) && value > 0;
}

struct Side {
  double mean = 0, squares = 0;
};

/// Replicates of one sample on one analyzer (Welford, Technometrics 4 (1962) 419).
Side results(double truth, double sd, int replicates, double resolution, RandomNormal& draw) {
  Side side;
  for (int i = 1; i <= replicates; ++i) {
    double value = truth + sd * draw();
    if (resolution > 0) value = resolution * std::round(value / resolution);
    const double off = value - side.mean;
    side.mean += off / i;
    side.squares += off * (value - side.mean);
  }
  return side;
}

void scale(ErrorModel& model, double factor) {
  model.at_zero *= factor;
  model.relative *= factor;
  for (double* of_estimate : {&model.at_zero_variance, &model.covariance, &model.relative_variance})
    *of_estimate *= factor * factor;
}
}  // namespace

PairConditions PairConditions::with_errors(double factor) const {
  PairConditions changed = *this;
  changed.sd_x *= factor;
  changed.sd_y *= factor;
  for (ErrorVariance* variance : {&changed.ratio.x, &changed.ratio.y}) variance->variance *= factor * factor;
  for (ErrorModel* model : {&changed.ratio.x_model, &changed.ratio.y_model}) scale(*model, factor * factor);
  return changed;
}

double PairConditions::sd_x_at(double level) const {
  return sd_x * growth(ratio.x_model, samples.mean(), level);
}

double PairConditions::sd_y_at(double level) const {
  return sd_y * growth(ratio.y_model, samples.mean(), level);
}

double PairConditions::sd_of_pair() const {
  return std::sqrt(sd_x * sd_x / x_replicates + sd_y * sd_y / y_replicates);
}

void require_valid(const PairConditions& conditions) {
  if (!positive(conditions.sd_x) || !positive(conditions.sd_y))
    throw std::invalid_argument("sd_x, sd_y: expected positive, finite standard deviations of one result");
  if (!conditions.ratio.known || !positive(conditions.ratio.lambda))
    throw std::invalid_argument("ratio: expected a known error ratio");
  if (conditions.x_replicates < 1 || conditions.y_replicates < 1)
    throw std::invalid_argument("replicates: expected at least one result a side");
  for (const ErrorModel* model : {&conditions.ratio.x_model, &conditions.ratio.y_model})
    if (model->growth != ErrorGrowth::constant && !positive(model->variance_at(conditions.samples.mean())))
      throw std::invalid_argument("ratio: expected errors that do not vanish at the samples' mean value");
}

ErrorRatio ratio_as_known(const ErrorRatio& expected, RandomNormal& draw) {
  const double df_x = expected.x.degrees_of_freedom, df_y = expected.y.degrees_of_freedom;
  if (!expected.estimated || !(df_x > 0 && df_y > 0)) return expected;
  ErrorRatio known = expected;
  const double of_x = draw.chi_squared(df_x) / df_x, of_y = draw.chi_squared(df_y) / df_y;
  known.x.variance *= of_x;
  known.y.variance *= of_y;
  scale(known.x_model, of_x);
  scale(known.y_model, of_y);
  for (double* bound : {&known.lambda, &known.low, &known.high}) *bound *= of_x / of_y;
  return known;
}

Pair draw_pair(const PairConditions& conditions, const EstablishedLine& relation, double shift,
               double resolution, Instant at, RandomNormal& draw) {
  const auto values = conditions.samples.values();
  const double truth = values[static_cast<std::size_t>(draw.uniform() * static_cast<double>(values.size()))];
  const Side x = results(truth, conditions.sd_x_at(truth), conditions.x_replicates, resolution, draw);
  const Side y = results(relation.intercept + relation.slope * truth + shift, conditions.sd_y_at(truth),
                         conditions.y_replicates, resolution, draw);
  return {{}, at, x.mean, y.mean, conditions.x_replicates, conditions.y_replicates, x.squares, y.squares};
}

}  // namespace agreed::plan
