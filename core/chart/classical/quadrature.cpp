#include "core/chart/classical/quadrature.hpp"

#include <cmath>
#include <numbers>
#include <utility>

namespace agreed::classical {
namespace {

struct Polynomial {
  double value = 0, slope = 0;
};

/// The Legendre polynomial of this degree and its derivative, |x| < 1.
Polynomial legendre(int degree, double x) {
  double before = 1, value = x;
  for (int k = 2; k <= degree; ++k) {
    const double next = ((2 * k - 1) * x * value - (k - 1) * before) / k;
    before = std::exchange(value, next);
  }
  if (degree == 0) return {1, 0};
  return {value, degree * (x * value - before) / (x * x - 1)};
}

void swap_rows(std::vector<double>& a, std::size_t n, std::size_t i, std::size_t j) {
  for (std::size_t column = 0; column < n; ++column) std::swap(a[i * n + column], a[j * n + column]);
}

std::size_t pivot_row(const std::vector<double>& a, std::size_t n, std::size_t column) {
  std::size_t best = column;
  for (std::size_t row = column + 1; row < n; ++row)
    if (std::abs(a[row * n + column]) > std::abs(a[best * n + column])) best = row;
  return best;
}

}  // namespace

std::vector<Node> legendre_nodes(int count, double from, double to) {
  const double middle = (from + to) / 2, half = (to - from) / 2;
  std::vector<Node> nodes;
  nodes.reserve(static_cast<std::size_t>(count));
  for (int i = count; i >= 1; --i) {
    double x = std::cos(std::numbers::pi * (i - 0.25) / (count + 0.5));
    for (int step = 0; step < 20; ++step) {
      const Polynomial p = legendre(count, x);
      const double move = p.value / p.slope;
      x -= move;
      if (std::abs(move) < 1e-15) break;
    }
    const double slope = legendre(count, x).slope;
    nodes.push_back({middle + half * x, half * 2 / ((1 - x * x) * slope * slope)});
  }
  return nodes;
}

std::vector<double> solve(std::vector<double> a, std::vector<double> b) {
  const std::size_t n = b.size();
  for (std::size_t column = 0; column < n; ++column) {
    const std::size_t pivot = pivot_row(a, n, column);
    swap_rows(a, n, column, pivot);
    std::swap(b[column], b[pivot]);
    for (std::size_t row = column + 1; row < n; ++row) {
      const double factor = a[row * n + column] / a[column * n + column];
      for (std::size_t k = column; k < n; ++k) a[row * n + k] -= factor * a[column * n + k];
      b[row] -= factor * b[column];
    }
  }
  for (std::size_t row = n; row-- > 0;) {
    for (std::size_t k = row + 1; k < n; ++k) b[row] -= a[row * n + k] * b[k];
    b[row] /= a[row * n + row];
  }
  return b;
}

double normal_density(double z) {
  return std::exp(-z * z / 2) / std::sqrt(2 * std::numbers::pi);
}

}  // namespace agreed::classical
