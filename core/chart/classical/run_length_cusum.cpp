// Run lengths of the tabular cumulative sum.
#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "core/base/distributions.hpp"
#include "core/chart/classical/quadrature.hpp"
#include "core/chart/classical/run_length.hpp"

namespace agreed::classical {
namespace {
constexpr int kLeastNodes = 32, kNodesPerSd = 5;
constexpr double kHighest = 100;
}  // namespace

// L(u) = 1 + L(0) P(sum falls to 0 from u) + integral over 0 < y < limit of L(y) f(y + allowance - u). The
// unknowns are L(0), then L at the nodes.
double cusum_run_length_one_sided(double allowance, double limit, double shift) {
  if (!(limit > 0 && limit <= kHighest)) throw std::domain_error("limit: expected above 0 to 100");
  if (!(allowance >= 0 && std::isfinite(allowance))) throw std::domain_error("allowance: expected 0 or more");
  const auto nodes = legendre_nodes(kLeastNodes + static_cast<int>(std::ceil(kNodesPerSd * limit)), 0, limit);
  const std::size_t n = nodes.size() + 1;
  std::vector<double> system(n * n);
  for (std::size_t i = 0; i < n; ++i) {
    const double u = i == 0 ? 0.0 : nodes[i - 1].x;
    system[i * n] = -normal_cdf(allowance - u - shift);
    for (std::size_t j = 1; j < n; ++j)
      system[i * n + j] = -nodes[j - 1].weight * normal_density(nodes[j - 1].x + allowance - u - shift);
    system[i * n + i] += 1;
  }
  const double length = solve(system, std::vector<double>(n, 1.0))[0];
  return length > 0 && length < kLongestRunLength ? length : kLongestRunLength;
}

double cusum_run_length(double allowance, double limit, double shift) {
  const double upper = cusum_run_length_one_sided(allowance, limit, shift);
  const double lower = cusum_run_length_one_sided(allowance, limit, -shift);
  return 1 / (1 / upper + 1 / lower);
}

}  // namespace agreed::classical
