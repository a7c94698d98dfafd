#include "core/pair/moments.hpp"

#include <algorithm>

namespace agreed {

Moments::Moments(std::span<const Point> points) {
  if (points.empty()) return;
  origin = points.front();
  n = static_cast<int>(points.size());
  for (const Point p : points) {
    mean.x += p.x - origin.x;
    mean.y += p.y - origin.y;
  }
  mean.x /= n;
  mean.y /= n;
  Point rest;  // what rounding left of the sum of deviations
  for (const Point p : points) {
    const Point c = centred(p);
    rest.x += c.x;
    rest.y += c.y;
    sxx += c.x * c.x;
    sxy += c.x * c.y;
    syy += c.y * c.y;
  }
  sxx -= rest.x * rest.x / n;
  sxy -= rest.x * rest.y / n;
  syy -= rest.y * rest.y / n;
}

void Moments::add(Point in) {
  if (n == 0) {
    *this = Moments(std::span<const Point>(&in, 1));
    return;
  }
  const Point c = centred(in);
  ++n;
  const double weight = static_cast<double>(n - 1) / n;
  mean.x += c.x / n;
  mean.y += c.y / n;
  sxx += weight * c.x * c.x;
  sxy += weight * c.x * c.y;
  syy += weight * c.y * c.y;
}

void Moments::remove(Point out) {
  if (n <= 2) {
    // One is left: its value is what the mean of two says beyond the one that goes.
    const Point c = centred(out);
    mean = {mean.x - c.x, mean.y - c.y};
    sxx = sxy = syy = 0;
    if (--n <= 0) *this = Moments();
    return;
  }
  const Point c = centred(out);
  const double weight = static_cast<double>(n) / (n - 1);
  --n;
  mean.x -= c.x / n;
  mean.y -= c.y / n;
  sxx = std::max(0.0, sxx - weight * c.x * c.x);
  sxy -= weight * c.x * c.y;
  syy = std::max(0.0, syy - weight * c.y * c.y);
}

void Moments::replace(Point out, Point in) {
  const Point old_out = centred(out);
  const Point step{in.x - out.x, in.y - out.y};
  mean.x += step.x / n;
  mean.y += step.y / n;
  const Point new_in = centred(in);
  sxx = std::max(0.0, sxx + step.x * (new_in.x + old_out.x));
  sxy += 0.5 * (step.x * (new_in.y + old_out.y) + step.y * (new_in.x + old_out.x));
  syy = std::max(0.0, syy + step.y * (new_in.y + old_out.y));
}

}  // namespace agreed
