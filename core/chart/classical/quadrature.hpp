#pragma once
// Gauss-Legendre quadrature, and the linear systems that integral equations become with it.
#include <vector>

namespace agreed::classical {

struct Node {
  double x = 0, weight = 0;
};

/// `count` >= 1 nodes on [from, to]. Newton's method on the Legendre polynomial; 1e-14 relative.
[[nodiscard]] std::vector<Node> legendre_nodes(int count, double from, double to);

/// x of A x = b by elimination with row pivoting; `a` row by row, b.size() squared numbers. O(n^3).
[[nodiscard]] std::vector<double> solve(std::vector<double> a, std::vector<double> b);

/// Density of the standard normal distribution.
[[nodiscard]] double normal_density(double z);

}  // namespace agreed::classical
