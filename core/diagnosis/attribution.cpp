#include "core/diagnosis/attribution.hpp"

#include <algorithm>
#include <cmath>
#include <cstddef>

namespace agreed {
namespace {
constexpr std::size_t kX = 0, kY = 1, kPairs = 2;
// A standard error below this part of tau is taken for it: a covariance stays invertible.
constexpr double kLeastError = 1e-7;

/// How the estimates of x, of y and of the pairs answer to one free shift.
using Column = std::array<double, 3>;
struct Explanation {
  std::array<Column, 2> columns{};
  std::size_t free = 1;
};

Explanation explanation_of(Moved moved, double slope) {
  const Column x{1, 0, -slope}, y{0, 1, 1}, samples{0, 0, 1};
  switch (moved) {
    case Moved::x:
      return {{x, {}}, 1};
    case Moved::y:
      return {{y, {}}, 1};
    case Moved::both:
      return {{x, y}, 2};
    default:
      return {{samples, {}}, 1};
  }
}

double tau_of(const Shift& pairs) {
  return std::max(std::abs(pairs.value), 2 * pairs.se);
}

/// The estimates there are, in units of tau.
struct Estimates {
  std::array<double, 3> value{}, variance{};
  std::array<std::size_t, 3> of{};
  std::size_t n = 0;

  Estimates(const ShiftEstimates& shifts, double tau) {
    const auto add = [&](const std::optional<Shift>& shift, std::size_t which) {
      if (!shift) return;
      const double error = std::max(shift->se / tau, kLeastError);
      value[n] = shift->value / tau;
      variance[n] = error * error;
      of[n++] = which;
    };
    add(shifts.x, kX);
    add(shifts.y, kY);
    add(shifts.pairs, kPairs);
  }
};

/// The covariance of the estimates under an explanation, as its lower triangle factor, and what it says of
/// them.
struct Likelihood {
  double log_density = 0;
  std::array<double, 3> weights{};  ///< inverse covariance times the estimates

  Likelihood(const Estimates& estimates, const Explanation& explanation) {
    std::array<std::array<double, 3>, 3> l{};
    for (std::size_t i = 0; i < estimates.n; ++i)
      for (std::size_t j = 0; j <= i; ++j) {
        double sum = i == j ? estimates.variance[i] : 0.0;
        for (std::size_t c = 0; c < explanation.free; ++c)
          sum += explanation.columns[c][estimates.of[i]] * explanation.columns[c][estimates.of[j]];
        for (std::size_t k = 0; k < j; ++k) sum -= l[i][k] * l[j][k];
        l[i][j] = i == j ? std::sqrt(std::max(sum, kLeastError * kLeastError)) : sum / l[j][j];
      }
    std::array<double, 3> half{};
    for (std::size_t i = 0; i < estimates.n; ++i) {
      half[i] = estimates.value[i];
      for (std::size_t k = 0; k < i; ++k) half[i] -= l[i][k] * half[k];
      half[i] /= l[i][i];
      log_density -= half[i] * half[i] / 2 + std::log(l[i][i]);
    }
    for (std::size_t i = estimates.n; i-- > 0;) {
      weights[i] = half[i];
      for (std::size_t k = i + 1; k < estimates.n; ++k) weights[i] -= l[k][i] * weights[k];
      weights[i] /= l[i][i];
    }
  }
};

constexpr std::array<Moved, 4> kExplanations = {Moved::x, Moved::y, Moved::both, Moved::neither};
}  // namespace

Moved Attribution::most_probable() const {
  const auto largest_at = std::max_element(probability.begin(), probability.end());
  return kExplanations[static_cast<std::size_t>(largest_at - probability.begin())];
}

double Attribution::largest() const {
  return *std::max_element(probability.begin(), probability.end());
}

Attribution attribute(const ShiftEstimates& shifts) {
  Attribution result;
  result.probability.fill(0.25);
  const double tau = tau_of(shifts.pairs);
  if (!(tau > 0)) return result;
  const Estimates estimates(shifts, tau);
  std::array<double, 4> log_density{};
  for (std::size_t i = 0; i < kExplanations.size(); ++i)
    log_density[i] = Likelihood(estimates, explanation_of(kExplanations[i], shifts.slope)).log_density;
  const double best = *std::max_element(log_density.begin(), log_density.end());
  double sum = 0;
  for (std::size_t i = 0; i < kExplanations.size(); ++i)
    sum += result.probability[i] = std::exp(log_density[i] - best);
  for (double& p : result.probability) p /= sum;
  return result;
}

ExpectedChecks expected_checks(const ShiftEstimates& shifts, Moved explanation) {
  const double tau = tau_of(shifts.pairs);
  if (!(tau > 0)) return {};
  const Estimates estimates(shifts, tau);
  const Explanation columns = explanation_of(explanation, shifts.slope);
  const Likelihood likelihood(estimates, columns);
  ExpectedChecks expected;
  for (std::size_t c = 0; c < columns.free; ++c) {
    double shift = 0;  // posterior mean of this free shift
    for (std::size_t i = 0; i < estimates.n; ++i)
      shift += tau * columns.columns[c][estimates.of[i]] * likelihood.weights[i];
    expected.x += columns.columns[c][kX] * shift;
    expected.y += columns.columns[c][kY] * shift;
  }
  return expected;
}

}  // namespace agreed
