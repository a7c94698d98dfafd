#include "core/pair/replicate_errors.hpp"

#include "core/pair/error_ratio.hpp"

namespace agreed {

void ReplicatePool::Side::add(int replicates, double sum_of_squares, double unit) {
  if (replicates < 2 || !(unit > 0)) return;
  squares += sum_of_squares / unit;
  df += replicates - 1;
}

void ReplicatePool::add(const Pair& pair) {
  const bool constant = growth_ == ErrorGrowth::constant;
  x_.add(pair.x_replicates, pair.x_squares, constant ? 1 : pair.x * pair.x);
  y_.add(pair.y_replicates, pair.y_squares, constant ? 1 : pair.y * pair.y);
  levels_ += (pair.x + pair.y) / 2;
  ++pairs_;
}

ErrorModel ReplicatePool::model_of(const Side& side) const {
  const bool constant = growth_ == ErrorGrowth::constant;
  const double mean = side.squares / side.df, variance = 2 * mean * mean / side.df;
  ErrorModel model;
  model.growth = growth_;
  model.at_zero = constant ? mean : 0;
  model.at_zero_variance = constant ? variance : 0;
  model.relative = constant ? 0 : mean;
  model.relative_variance = constant ? 0 : variance;
  return model;
}

ErrorRatio ReplicatePool::ratio() const {
  if (x_.df > 0 && y_.df > 0) return ratio_of(model_of(x_), model_of(y_), levels_ / pairs_);
  ErrorRatio unknown;
  unknown.reason = x_.df > 0 ? "no_replicates_of_y" : "no_replicates_of_x";
  return unknown;
}

}  // namespace agreed
