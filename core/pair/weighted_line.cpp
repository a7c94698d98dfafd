#include "core/pair/weighted_line.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace agreed {
namespace {
constexpr int kMostPasses = 200;
constexpr double kConverged = 1e-13;
constexpr double kNear = 1e-10;

// Sums over the pairs at one line, coordinates relative to a centre: the weighted mean of the pass before, so
// that nothing cancels where the weight lies far from the middle of the pairs.
struct Sums {
  Point centre;
  double w = 0, wx = 0, wy = 0, wa = 0, wax = 0, way = 0;

  void add(const WeighedPair& p) {
    const double x = p.point.x - centre.x, y = p.point.y - centre.y;
    w += p.weight;
    wx += p.weight * x;
    wy += p.weight * y;
    const double wa_here = p.weight * (p.adjusted - centre.x);
    wa += wa_here;
    wax += wa_here * x;
    way += wa_here * y;
  }
  [[nodiscard]] Point mean() const { return {centre.x + wx / w, centre.y + wy / w}; }
  // York's slope: the adjusted values need no centring, since the centred x and y have weighted means of
  // zero.
  [[nodiscard]] double slope() const { return (way - wa * (wy / w)) / (wax - wa * (wx / w)); }
};

// Sums of squares about the weighted mean and about the mean of the adjusted values.
struct SecondSums {
  double chi_square = 0, x_error = 0, squares_x = 0, squares_adjusted = 0;
};
}  // namespace

bool ErrorLaw::needs_positive_levels() const {
  return !(x.at_zero > 0 && y.at_zero > 0);
}

ErrorLaw weighted_deming_law(double lambda) {
  ErrorLaw law;
  law.lambda = lambda;
  law.common_level = true;
  law.x.growth = law.y.growth = ErrorGrowth::proportional;
  law.x.at_zero = law.y.at_zero = 0;
  law.x.relative = lambda;
  law.y.relative = 1;
  return law;
}

Weighing::Weighing(const ErrorLaw& law, Point origin, Point mean_shares)
    : law_(law), origin_(origin), mean_shares_(mean_shares) {
  if (!law.common_level) return;
  const double lambda = law.lambda * mean_shares.x / mean_shares.y;  // of the means of replicates
  x_part_ = lambda / (1 + lambda);
  y_part_ = 1 / (1 + lambda);
}

LineParameters Weighing::parameters_of(const DemingLine& line) const {
  const double offset = line.mean_x - origin_.x;
  const double mean_y = line.mean_difference + offset + (origin_.x - origin_.y);
  return {mean_y - line.slope * offset, line.slope};
}

namespace {
Point mean_of(std::span<const Point> shares) {
  Point sum;
  for (const Point share : shares) {
    sum.x += share.x;
    sum.y += share.y;
  }
  const auto n = static_cast<double>(std::max<std::size_t>(1, shares.size()));
  return {sum.x / n, sum.y / n};
}
}  // namespace

WeightedPairs::WeightedPairs(std::span<const Point> points, std::span<const Point> shares,
                             const ErrorLaw& law, Point origin)
    : points_(points), shares_(shares), weighing_(law, origin, mean_of(shares)) {}

WeightedPairs::Solution WeightedPairs::solve(LineParameters start, std::size_t left_out) const {
  Solution solution{{}, start, 0};
  double change_before = std::numeric_limits<double>::infinity();
  Point centre;
  for (int pass = 1; pass <= kMostPasses; ++pass) {
    Sums sums{centre};
    for (std::size_t i = 0; i < points_.size(); ++i)
      if (i != left_out) sums.add(weigh(i, solution.line));
    centre = sums.mean();
    const double slope = sums.slope(), change = std::abs(slope - solution.line.slope);
    solution.line = {centre.y - slope * centre.x, slope};
    solution.passes = pass;
    if (!(std::isfinite(slope) && std::isfinite(centre.y))) {
      solution.reason = no_line::no_direction;
      return solution;
    }
    // Or as near as rounding lets it come.
    if (change <= kConverged * std::abs(slope) ||
        (change <= kNear * std::abs(slope) && change >= change_before))
      return solution;
    change_before = change;
  }
  solution.reason = no_line::not_converged;
  return solution;
}

WeightedLine weighted_line(const WeightedPairs& pairs, double start_slope) {
  WeightedLine fit;
  fit.n = static_cast<int>(pairs.size());
  if (fit.n < 3) {
    fit.line.reason = no_line::too_few_pairs;
    return fit;
  }
  const auto solution = pairs.solve({0, start_slope}, pairs.size());
  if (!solution.reason.empty()) {
    fit.line.reason = solution.reason;
    return fit;
  }
  Sums sums{};
  double lowest = std::numeric_limits<double>::infinity();
  for (std::size_t i = 0; i < pairs.size(); ++i) {
    const auto p = pairs.weigh(i, solution.line);
    sums.add(p);
    lowest = std::min(lowest, p.level);
  }
  if (pairs.weighing().law().needs_positive_levels() && !(lowest > 0)) {
    fit.line.reason = no_line::level_not_positive;
    return fit;
  }
  const Point mean = sums.mean();
  const double mean_adjusted = sums.wa / sums.w;
  SecondSums second;
  for (std::size_t i = 0; i < pairs.size(); ++i) {
    const auto p = pairs.weigh(i, solution.line);
    const double x = p.point.x - mean.x, adjusted = p.adjusted - mean_adjusted;
    second.chi_square += p.weight * p.residual * p.residual;
    second.x_error += p.weight * p.errors.x;
    second.squares_x += p.weight * x * x;
    second.squares_adjusted += p.weight * adjusted * adjusted;
  }
  if (!(second.squares_adjusted > 0)) {
    fit.line.reason = no_line::no_spread;
    return fit;
  }
  const Point origin = pairs.weighing().origin(), shares = pairs.weighing().mean_shares();
  fit.line.slope = solution.line.slope;
  fit.line.mean_x = origin.x + mean.x;
  fit.line.mean_difference = (origin.y - origin.x) + (mean.y - mean.x);
  const PairErrors at_mean =
      pairs.weighing().errors_at({fit.line.mean_x, fit.line.mean_x + fit.line.mean_difference});
  fit.line.delta = shares.y * at_mean.y / (shares.x * at_mean.x);
  // York's errors hold about the mean of the adjusted values, the line goes through that of the observed
  // ones.
  const double slope_variance = 1 / second.squares_adjusted, offset = mean.x - mean_adjusted;
  fit.covariance = {1 / sums.w + offset * offset * slope_variance, offset * slope_variance, slope_variance};
  fit.chi_square = second.chi_square;
  fit.x_error = second.x_error / sums.w;
  fit.x_spread = second.squares_x / sums.w * fit.n / (fit.n - 1);
  return fit;
}

WeightedLine york_line(std::span<const Point> points, std::span<const Point> variances) {
  const Moments moments(points);
  const Point mean = mean_of(variances);
  const DemingLine start = deming_line(moments, mean.y / mean.x);
  if (!start.exists()) return {start, {}, 0, moments.n, 0, 0};
  const ErrorLaw law;  // one for both, so that the shares are the variances themselves
  const Point origin{moments.mean_x(), moments.mean_x() + moments.mean_difference()};
  return weighted_line(WeightedPairs(points, variances, law, origin), start.slope);
}

}  // namespace agreed
