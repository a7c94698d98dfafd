#include "core/pair/replicate_errors.hpp"

#include <cmath>

#include "core/pair/error_ratio.hpp"

namespace agreed {
namespace {
struct Pool {
  double squares = 0, df = 0;

  // `share`: 1 / replicates.
  void add(double share, double sum_of_squares, double unit) {
    const double more = std::round(1 / share) - 1;
    if (!(more > 0 && unit > 0)) return;
    squares += sum_of_squares / unit;
    df += more;
  }
};

ErrorModel model_of(const Pool& pool, ErrorGrowth growth) {
  ErrorModel model;
  model.growth = growth;
  const double mean = pool.squares / pool.df, variance = 2 * mean * mean / pool.df;
  const bool constant = growth == ErrorGrowth::constant;
  model.at_zero = constant ? mean : 0;
  model.at_zero_variance = constant ? variance : 0;
  model.relative = constant ? 0 : mean;
  model.relative_variance = constant ? 0 : variance;
  return model;
}
}  // namespace

ErrorRatio ratio_from_replicates(const Window& window, ErrorGrowth growth) {
  const bool constant = growth == ErrorGrowth::constant;
  Pool x, y;
  double level = 0;
  const auto points = window.points();
  const auto entries = window.entries();
  for (std::size_t i = 0; i < points.size(); ++i) {
    const Point p = points[i];
    x.add(entries[i].x_share, entries[i].x_squares, constant ? 1 : p.x * p.x);
    y.add(entries[i].y_share, entries[i].y_squares, constant ? 1 : p.y * p.y);
    level += (p.x + p.y) / (2 * window.size());
  }
  if (!(x.df > 0 && y.df > 0)) {
    ErrorRatio unknown;
    unknown.reason = x.df > 0 ? "no_replicates_of_y" : "no_replicates_of_x";
    return unknown;
  }
  return ratio_of(model_of(x, growth), model_of(y, growth), level);
}

}  // namespace agreed
