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

void centre(std::vector<double>& values) {
  double mean = 0;
  for (const double value : values) mean += value;
  mean /= static_cast<double>(values.size());
  for (double& value : values) value -= mean;
}

// What of `values` the column does not explain; both are centred.
void take_out(const std::vector<double>& column, std::vector<double>& values) {
  const double slope = product(column, values) / product(column, column);
  for (std::size_t i = 0; i < values.size(); ++i) values[i] -= slope * column[i];
}
}  // namespace

std::optional<double> curvature_p(std::span<const Point> points, const WindowFit& fit) {
  const std::size_t n = points.size();
  if (n < 4) return std::nullopt;
  std::vector<double> v, w;
  for (const Point p : points) {
    const Point c = fit.moments.centred(p);
    v.push_back(fit.line.residual(c));
    w.push_back(fit.line.fitted(c));
  }
  centre(v);
  centre(w);
  double widest = 0;
  for (const double value : w) widest = std::max(widest, std::abs(value));
  if (!(widest > 0)) return std::nullopt;
  std::vector<double> square;
  for (double& value : w) {
    value /= widest;
    square.push_back(value * value);
  }
  centre(square);
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
