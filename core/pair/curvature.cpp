#include "core/pair/curvature.hpp"

#include <algorithm>
#include <cmath>
#include <vector>

#include "core/base/distributions.hpp"

namespace agreed {
namespace {
// Below this part of the whole, what is left of a column after the others is rounding.
constexpr double kNothingLeft = 1e-10;

double product(const std::vector<double>& a, const std::vector<double>& b) {
  double sum = 0;
  for (std::size_t i = 0; i < a.size(); ++i) sum += a[i] * b[i];
  return sum;
}

// What of `values` the column does not explain.
void take_out(const std::vector<double>& column, std::vector<double>& values) {
  const double slope = product(column, values) / product(column, column);
  for (std::size_t i = 0; i < values.size(); ++i) values[i] -= slope * column[i];
}
}  // namespace

std::optional<double> curvature_p(std::span<const Point> points, const WindowFit& fit) {
  const std::size_t n = points.size();
  if (n < 4) return std::nullopt;
  // Each row is divided by the sd of its residual, so that errors that grow with the level count as they
  // should.
  std::vector<double> one, v, w;
  for (const Point p : points) {
    const double fitted = fit.fitted(p, {1, 1});
    const double variance = fit.weighted() ? fit.residual_variance_at(fit.line.mean_x + fitted) : 1;
    if (!(variance > 0)) return std::nullopt;
    one.push_back(1 / std::sqrt(variance));
    v.push_back(fit.residual(p) * one.back());
    w.push_back(fitted * one.back());
  }
  take_out(one, v);
  take_out(one, w);
  double widest = 0;
  for (const double value : w) widest = std::max(widest, std::abs(value));
  if (!(widest > 0)) return std::nullopt;
  std::vector<double> square;
  for (std::size_t i = 0; i < n; ++i) {
    w[i] /= widest;
    square.push_back(w[i] * w[i] / one[i]);
  }
  take_out(one, square);
  const double whole = product(square, square);
  take_out(w, square);
  take_out(w, v);
  const double spread = product(square, square), scatter = product(v, v);
  if (!(spread > kNothingLeft * whole) || !(scatter > 0)) return std::nullopt;
  const double along = product(square, v), gain = along * along / spread;
  const double df = static_cast<double>(n) - 3, rest = std::max(0.0, scatter - gain);
  if (!(rest > 0)) return 0;
  return f_tail(gain / (rest / df), 1, df);
}

}  // namespace agreed
