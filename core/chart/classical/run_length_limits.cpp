// Run lengths of the limits alone, and of the limits with the moving range.
#include <algorithm>
#include <cmath>

#include "core/base/distributions.hpp"
#include "core/chart/classical/constants.hpp"
#include "core/chart/classical/quadrature.hpp"
#include "core/chart/classical/run_length.hpp"
#include "core/chart/moving_range.hpp"

namespace agreed::classical {

double limits_run_length(double width, double shift) {
  return std::min(kLongestRunLength, 1 / (normal_tail(width - shift) + normal_tail(width + shift)));
}

// L(x), the run length after a reading x within the limits, is 1 + integral of L(y) f(y) over the readings y
// that lie within the limits and no further than r from x. Below -c and above c, c = r - 3, one end of that
// range is x -+ r; between them it is all that lies within the limits and L is one constant. Each of the two
// smooth branches is held at Gauss-Legendre nodes and interpolated where a partial integral needs it.
namespace {
constexpr int kBranchNodes = 24, kPartialNodes = 24;
constexpr double kLargestRange = kMovingRangeLimit * kD2;
constexpr double kInner = kLargestRange - kLimitWidth;

/// Weights of the values at `nodes` in the polynomial through them at x.
std::vector<double> lagrange(const std::vector<Node>& nodes, double x) {
  std::vector<double> weights(nodes.size(), 1.0);
  for (std::size_t i = 0; i < nodes.size(); ++i)
    for (std::size_t j = 0; j < nodes.size(); ++j)
      if (i != j) weights[i] *= (x - nodes[j].x) / (nodes[i].x - nodes[j].x);
  return weights;
}

/// Unknowns: L in the middle, then at the nodes of the branch below, then of that above.
struct Equations {
  std::vector<Node> nodes = legendre_nodes(kBranchNodes, kInner, kLimitWidth);
  double shift;
  std::size_t size = 1 + 2 * nodes.size();

  explicit Equations(double off) : shift(off) {}

  [[nodiscard]] double middle_weight() const {
    return normal_tail(-kInner - shift) - normal_tail(kInner - shift);
  }
  /// Position and density of a node of the branch on `side`.
  [[nodiscard]] std::size_t at(int side, std::size_t i) const {
    return 1 + (side > 0 ? nodes.size() : 0) + i;
  }
  void add_branch(double* row, int side) const {
    for (std::size_t i = 0; i < nodes.size(); ++i)
      row[at(side, i)] += nodes[i].weight * normal_density(side * nodes[i].x - shift);
  }
  /// Of the branch on `side`, only what lies nearer to the centre than `most`.
  void add_part(double* row, int side, double most) const {
    for (const Node& node : legendre_nodes(kPartialNodes, kInner, most)) {
      const double factor = node.weight * normal_density(side * node.x - shift);
      const std::vector<double> parts = lagrange(nodes, node.x);
      for (std::size_t i = 0; i < nodes.size(); ++i) row[at(side, i)] += factor * parts[i];
    }
  }
};
}  // namespace

double individuals_run_length(double shift) {
  const Equations equations(shift);
  const std::size_t n = equations.size, branch = equations.nodes.size();
  std::vector<double> kernel(n * n, 0.0);
  for (std::size_t row = 0; row < n; ++row) {
    double* entries = kernel.data() + row * n;
    entries[0] += equations.middle_weight();
    if (row == 0) {
      equations.add_branch(entries, -1);
      equations.add_branch(entries, 1);
      continue;
    }
    const bool upper = row > branch;
    const int side = upper ? 1 : -1;
    equations.add_branch(entries, side);
    equations.add_part(entries, -side, kLargestRange - equations.nodes[row - 1 - (upper ? branch : 0)].x);
  }
  std::vector<double> system(n * n, 0.0);
  for (std::size_t i = 0; i < n * n; ++i) system[i] = (i % (n + 1) == 0 ? 1.0 : 0.0) - kernel[i];
  // The first reading is as if it came after one in the middle: no moving range can condemn it.
  return std::min(kLongestRunLength, solve(system, std::vector<double>(n, 1.0))[0]);
}

}  // namespace agreed::classical
