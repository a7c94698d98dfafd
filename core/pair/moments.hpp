#pragma once
// Purpose: mean and sums of squares and products of pairs that come and go one by one.
// Inputs: any finite pairs (x, y), both in the measurand's unit.
// Method: values are taken relative to an origin (the first value), then Welford's update (Technometrics 4
//   (1962) 419) in the bivariate form of Chan, Golub and LeVeque (Am. Stat. 37 (1983) 242); one-step
//   replacement keeps n and avoids adding and removing.
// Accuracy: about 1e-12 relative after 1e5 steps on well-behaved data; a removed value that carried nearly
// all
//   of a sum leaves only its rounding error behind, so the holder rebuilds then (see Window).
// Degenerate: no pairs: all zero. One pair: the sums are zero.
// Cost: O(1) a step, O(n) to build.
#include <span>

namespace agreed {

struct Point {
  double x = 0, y = 0;
};

struct Moments {
  Point origin;  ///< what the means are relative to
  int n = 0;
  Point mean;  ///< relative to the origin
  double sxx = 0, sxy = 0, syy = 0;

  Moments() = default;
  /// Two passes over the pairs, the first one being the origin.
  explicit Moments(std::span<const Point> points);

  void add(Point in);
  /// `out` is one of those added; n > 0.
  void remove(Point out);
  void replace(Point out, Point in);

  /// The pair relative to the mean.
  [[nodiscard]] Point centred(Point p) const {
    return {(p.x - origin.x) - mean.x, (p.y - origin.y) - mean.y};
  }
  [[nodiscard]] double mean_x() const { return origin.x + mean.x; }
  /// Mean of y - x.
  [[nodiscard]] double mean_difference() const { return (origin.y - origin.x) + (mean.y - mean.x); }
};

}  // namespace agreed
