#include "core/chart/moving_range.hpp"

#include <cmath>
#include <numbers>
#include <stdexcept>

namespace agreed {
namespace {
constexpr double kPi = std::numbers::pi;

// From here on the series of 1 - c4 is good to 2e-10 relative.
constexpr double kSeriesFrom = 20;

// 1 - E(s)/sigma on nu degrees of freedom. The series is that of the ratio of gamma functions (Tricomi and
// Erdelyi, Pacific J. Math. 1 (1951) 133); it keeps the digits that 1 - c4 loses.
double one_minus_c4(double nu) {
  if (nu < kSeriesFrom) return 1 - std::sqrt(2 / nu) * std::tgamma((nu + 1) / 2) / std::tgamma(nu / 2);
  constexpr double kSeries[] = {1.0 / 4,      -1.0 / 32,      -5.0 / 128,       21.0 / 2048,
                                399.0 / 8192, -869.0 / 65536, -39325.0 / 262144};
  double sum = 0, power = 1;
  for (const double term : kSeries) {
    power /= nu;
    sum += term * power;
  }
  return sum;
}

double squared_variation(double nu) {
  const double d = one_minus_c4(nu);
  return d * (2 - d) / ((1 - d) * (1 - d));
}
}  // namespace

double moving_range_variance(std::int64_t n) {
  if (n < 2) throw std::domain_error("n: a moving range needs 2 readings");
  const auto m = static_cast<double>(n - 1);
  const double neighbours = 4 / kPi * (std::sqrt(3.0) / 2 + kPi / 12 - 1);
  return (m * (2 - 4 / kPi) + 2 * (m - 1) * neighbours) / (m * m);
}

// The squared coefficient of variation is nearly 1/(2 nu), so the secant of nu * variation settles at once.
double moving_range_degrees_of_freedom(std::int64_t n) {
  const double wanted = moving_range_variance(n) / (4 / kPi);
  double nu = 1 / (2 * wanted) + 0.2;
  for (int i = 0; i < 20; ++i) {
    const double next = nu * squared_variation(nu) / wanted;
    const bool settled = std::abs(next - nu) < 1e-13 * nu;
    nu = next;
    if (settled) break;
  }
  return nu;
}

}  // namespace agreed
