#pragma once
// Purpose: the straight line y = b0 + b1 x through pairs whose errors differ from pair to pair: they grow
// with
//   the level, or are means of unequal numbers of replicates.
// Inputs: the pairs; of each what its replicates leave of the error variances (`shares`: 1 / replicates); the
//   law of the errors of single results.
// Method: the general fit of D. York, N. M. Evensen, M. Lopez Martinez and J. De Basabe Delgado, Am. J. Phys.
//   72 (2004) 367, for uncorrelated errors: weights 1 / (var y + b1^2 var x), slope from the adjusted points,
//   iterated; between two passes the variances are taken anew at the fitted levels. The level of a pair is
//   the fitted true value of x, x weighed against y by lambda, and that of y the line there. With
//   `common_level` both variances are taken at (level x + lambda level y) / (1 + lambda): the weighted Deming
//   regression of K. Linnet, Stat. Med. 9 (1990) 1463. The start is the Deming line.
// Assumptions: errors independent of each other; the law holds but for a common factor.
// Accuracy: slope converged to 1e-13 relative. Fixed variances: York's own line and standard errors, those at
//   the adjusted points (at the observed ones the third digit is wrong). They are too small on narrow ranges
//   (89 to 94 % coverage of 95 % intervals); the jackknife serves there.
// Degenerate: `reason` says why there is no line; a growing error needs fitted levels above zero.
// Cost: O(n) a pass, 4 to 8 passes where the pairs go well together; at most 200.
#include <algorithm>
#include <span>
#include <string_view>
#include <vector>

#include "core/pair/deming.hpp"
#include "core/pair/error_model.hpp"

namespace agreed {

/// Error variances of one pair, of its x and of its y.
struct PairErrors {
  double x = 1, y = 1;
};

/// How the error variances of single results follow from the level.
struct ErrorLaw {
  ErrorModel x, y;
  double lambda = 1;          ///< var x / var y, where the level is weighed
  bool common_level = false;  ///< both at one level: weighted Deming

  /// Of single results at the levels of x and y.
  [[nodiscard]] PairErrors at(double level_x, double level_y) const {
    return {x.variance_at(level_x), y.variance_at(level_y)};
  }
  /// Every variance goes down to zero with the level, so that levels must be above it.
  [[nodiscard]] bool needs_positive_levels() const;
};

/// Errors proportional to the level, both taken at one level: that of the weighted Deming regression.
[[nodiscard]] ErrorLaw weighted_deming_law(double lambda);

/// A line with what belongs to its weights.
struct WeightedLine {
  DemingLine line;  ///< through the weighted mean; `delta` is that of a pair of single results at it
  LineCovariance covariance;  ///< York's, of the variances as they are: not scaled by `chi_square`
  double chi_square = 0;      ///< sum of weight times squared residual
  int n = 0;
  double x_error = 0;   ///< weighted mean of the variances of x
  double x_spread = 0;  ///< weighted variance of x, divisor n - 1

  [[nodiscard]] bool exists() const { return line.exists(); }
  /// What the variances must be multiplied by to explain the scatter; n > 2.
  [[nodiscard]] double scale() const { return chi_square / (n - 2); }
};

/// A line: its y at the origin's x, relative to the origin's y, and its slope.
struct LineParameters {
  double at_origin = 0, slope = 1;
};

/// A pair as a line sees it; coordinates relative to the origin.
struct WeighedPair {
  Point point;
  PairErrors errors;  ///< at its level, of the means of its replicates
  double weight = 0, residual = 0;
  double adjusted = 0;  ///< true value of x
  double level = 0;     ///< the lower of the two at which the errors were taken
};

/// Level, error variances and weight of one pair at a line.
class Weighing {
 public:
  Weighing() = default;
  /// `origin`: about the mean of the pairs, so that nothing cancels; `mean_shares`: of the pairs.
  Weighing(const ErrorLaw& law, Point origin, Point mean_shares);

  [[nodiscard]] WeighedPair operator()(Point pair, Point shares, LineParameters line) const;
  /// Error variances of single results where the true values are these.
  [[nodiscard]] PairErrors errors_at(Point truth) const {
    const Point level = levels_of(truth);
    return law_.at(level.x, level.y);
  }
  [[nodiscard]] const ErrorLaw& law() const { return law_; }
  [[nodiscard]] Point origin() const { return origin_; }
  [[nodiscard]] Point mean_shares() const { return mean_shares_; }
  /// Parameters of a line that goes through its mean.
  [[nodiscard]] LineParameters parameters_of(const DemingLine& line) const;

 private:
  // The levels at which the errors of x and y are taken: the true values, or one between them for both.
  [[nodiscard]] Point levels_of(Point truth) const {
    return {truth.x + x_part_ * (truth.y - truth.x), truth.y + y_part_ * (truth.x - truth.y)};
  }

  ErrorLaw law_;
  Point origin_, mean_shares_{1, 1};
  double x_part_ = 0, y_part_ = 0;  ///< of the other side's level in the level of x and of y
};

// Here, since a fit does it some twenty times with each pair.
inline WeighedPair Weighing::operator()(Point pair, Point shares, LineParameters line) const {
  WeighedPair p;
  p.point = {pair.x - origin_.x, pair.y - origin_.y};
  p.residual = p.point.y - line.at_origin - line.slope * p.point.x;
  const double x_part = law_.lambda * shares.x * line.slope;
  const double fitted = p.point.x + x_part * p.residual / (shares.y + x_part * line.slope);
  const Point level = levels_of({origin_.x + fitted, origin_.y + line.at_origin + line.slope * fitted});
  p.level = std::min(level.x, level.y);
  p.errors = law_.at(level.x, level.y);
  p.errors.x *= shares.x;
  p.errors.y *= shares.y;
  p.weight = 1 / (p.errors.y + line.slope * line.slope * p.errors.x);
  p.adjusted = p.point.x + line.slope * p.errors.x * p.weight * p.residual;
  return p;
}

/// What one pair adds to the estimating equations: both sums are zero at the fit.
struct Pull {
  double mean = 0, slope = 0;
};

/// The pairs of one fit; what fit and jackknife share.
class WeightedPairs {
 public:
  /// As many shares as points; both outlive this.
  WeightedPairs(std::span<const Point> points, std::span<const Point> shares, const ErrorLaw& law,
                Point origin);

  [[nodiscard]] WeighedPair weigh(std::size_t i, LineParameters line) const {
    return weighing_(points_[i], shares_[i], line);
  }
  [[nodiscard]] Pull pull(std::size_t i, LineParameters line) const {
    const WeighedPair p = weigh(i, line);
    const double wr = p.weight * p.residual;
    return {wr, wr * p.adjusted};
  }

  /// The fit without pair `left_out` (size(): with all), from a start; `reason` set when there is none.
  struct Solution {
    std::string_view reason;
    LineParameters line;
    int passes = 0;
  };
  [[nodiscard]] Solution solve(LineParameters start, std::size_t left_out) const;

  /// The same pairs under another law.
  [[nodiscard]] WeightedPairs with(const ErrorLaw& law) const {
    return {points_, shares_, law, weighing_.origin()};
  }
  [[nodiscard]] std::size_t size() const { return points_.size(); }
  [[nodiscard]] const Weighing& weighing() const { return weighing_; }

 private:
  std::span<const Point> points_, shares_;
  Weighing weighing_;
};

/// The line of all pairs. `start_slope` is finite: the Deming slope will do.
[[nodiscard]] WeightedLine weighted_line(const WeightedPairs& pairs, double start_slope);

/// The line with given error variances of each pair (York's fit proper).
[[nodiscard]] WeightedLine york_line(std::span<const Point> points, std::span<const Point> variances);

}  // namespace agreed
