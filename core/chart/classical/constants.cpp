#include "core/chart/classical/constants.hpp"

#include <array>
#include <cmath>
#include <stdexcept>
#include <vector>

#include "core/base/distributions.hpp"
#include "core/chart/classical/quadrature.hpp"

namespace agreed::classical {
namespace {
constexpr int kTabled = 25;
// Beyond +-8.5 a normal density counts for nothing here, so no range exceeds twice that; the trapezoid rule
// converges faster than any power of its step for such integrands.
constexpr double kRangeEnd = 8.5, kStep = 0.125;
constexpr int kRangeNodes = 64;

void need_two(int n) {
  if (n < 2) throw std::domain_error("n: a spread needs 2 readings, got " + std::to_string(n));
}

struct Column {
  double density = 0, below = 0;  ///< of the normal distribution at one x
};

const std::vector<Column>& columns() {
  static const std::vector<Column> all = [] {
    std::vector<Column> made;
    for (double x = -kRangeEnd; x <= kRangeEnd; x += kStep)
      made.push_back({normal_density(x), normal_cdf(x)});
    return made;
  }();
  return all;
}

/// P(W > w).
double range_tail(int n, double w) {
  double below = 0, x = -kRangeEnd;
  for (const Column& column : columns()) {
    below += column.density * std::pow(normal_cdf(x + w) - column.below, n - 1);
    x += kStep;
  }
  return 1 - n * kStep * below;
}

RangeConstants computed(int n) {
  double mean = 0, square = 0;
  for (const Node& node : legendre_nodes(kRangeNodes, 0, 2 * kRangeEnd)) {
    const double tail = range_tail(n, node.x);
    mean += node.weight * tail;
    square += node.weight * 2 * node.x * tail;
  }
  return {mean, std::sqrt(square - mean * mean)};
}
}  // namespace

RangeConstants range_constants(int n) {
  need_two(n);
  if (n > kTabled) return computed(n);
  static const auto table = [] {
    std::array<RangeConstants, kTabled + 1> made;
    for (int i = 2; i <= kTabled; ++i) made.at(static_cast<std::size_t>(i)) = computed(i);
    return made;
  }();
  return table.at(static_cast<std::size_t>(n));
}

double c4(int n) {
  need_two(n);
  const double nu = n - 1;
  return std::sqrt(2 / nu) * gamma_half_step(nu / 2);
}

}  // namespace agreed::classical
