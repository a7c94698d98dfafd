// Run lengths of the exponentially weighted moving average.
#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "core/chart/classical/ewma.hpp"
#include "core/chart/classical/quadrature.hpp"
#include "core/chart/classical/run_length.hpp"

namespace agreed::classical {
namespace {
constexpr double kLeastWeight = 0.01;
constexpr double kStartForgotten = 1e-9;  // of (1 - w)^(2i)
constexpr double kFarthest = 9;           // standard deviations beyond which a density counts for nothing
constexpr int kLeastEwmaNodes = 40;
constexpr double kEwmaNodesPerSd = 3;

struct Scheme {
  double weight, width, shift;
  double limit = width * std::sqrt(weight / (2 - weight));
  int nodes = kLeastEwmaNodes + static_cast<int>(std::ceil(kEwmaNodesPerSd * 2 * limit / weight));

  Scheme(double w, double wide, double off) : weight(w), width(wide), shift(off) {
    if (!(w >= kLeastWeight && w <= 1)) throw std::domain_error("weight: expected 0.01 to 1");
    if (!(std::isfinite(wide) && wide > 0)) throw std::domain_error("width: expected above 0");
  }
  /// Density of the next E at y, after u.
  [[nodiscard]] double density(double y, double u) const {
    const double z = (y - (1 - weight) * u) / weight - shift;
    return std::abs(z) > kFarthest ? 0.0 : normal_density(z) / weight;
  }
};

/// Run lengths from each node, with limits of constant width.
std::vector<double> settled_run_lengths(const Scheme& scheme, const std::vector<Node>& nodes) {
  const std::size_t n = nodes.size();
  std::vector<double> system(n * n);
  for (std::size_t i = 0; i < n; ++i)
    for (std::size_t j = 0; j < n; ++j)
      system[i * n + j] = (i == j ? 1.0 : 0.0) - nodes[j].weight * scheme.density(nodes[j].x, nodes[i].x);
  return solve(system, std::vector<double>(n, 1.0));
}

double sensible(double run_length) {
  return run_length > 0 && run_length < kLongestRunLength ? run_length : kLongestRunLength;
}
}  // namespace

double ewma_run_length_asymptotic(double weight, double width, double shift) {
  const Scheme scheme(weight, width, shift);
  const auto nodes = legendre_nodes(scheme.nodes, -scheme.limit, scheme.limit);
  const std::vector<double> lengths = settled_run_lengths(scheme, nodes);
  double from_centre = 1;
  for (std::size_t j = 0; j < nodes.size(); ++j)
    from_centre += nodes[j].weight * scheme.density(nodes[j].x, 0) * lengths[j];
  return sensible(from_centre);
}

// Run length = sum of the chances to have no signal up to reading i, i = 0, 1, ..; from the settled limits on
// what is left is the density times the run length from there.
double ewma_run_length(double weight, double width, double shift) {
  const Scheme scheme(weight, width, shift);
  const auto unit = legendre_nodes(scheme.nodes, -1, 1);
  const std::size_t n = unit.size();
  std::vector<double> from = {0.0}, mass = {1.0};  // where E was, and with what chance
  double sum = 0;
  Ewma ewma;
  while (ewma.forgotten > kStartForgotten) {
    for (const double part : mass) sum += part;
    ewma.take(0, weight);
    const double limit = ewma.forgotten > kStartForgotten ? ewma.limit(weight, width) : scheme.limit;
    std::vector<double> at(n), next(n, 0.0);
    for (std::size_t j = 0; j < n; ++j) {
      at[j] = limit * unit[j].x;
      for (std::size_t i = 0; i < from.size(); ++i) next[j] += mass[i] * scheme.density(at[j], from[i]);
      next[j] *= limit * unit[j].weight;
    }
    from.swap(at);
    mass.swap(next);
  }
  const std::vector<double> lengths =
      settled_run_lengths(scheme, legendre_nodes(scheme.nodes, -scheme.limit, scheme.limit));
  for (std::size_t j = 0; j < n; ++j) sum += mass[j] * lengths[j];
  return sensible(sum);
}

}  // namespace agreed::classical
