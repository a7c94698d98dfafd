#include "core/plan/proof_power.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <stdexcept>

#include "core/base/distributions.hpp"
#include "core/chart/classical/quadrature.hpp"
#include "core/pair/bias.hpp"
#include "core/plan/expected_line.hpp"

namespace agreed::plan {
namespace {
constexpr double kFarTail = 9;  // what lies more standard deviations out is 1e-19
constexpr int kChiNodes = 64, kSlopeNodes = 24;

/// Gauss-Legendre nodes on [-1, 1].
template <int count>
const std::vector<classical::Node>& nodes() {
  static const auto known = classical::legendre_nodes(count, -1, 1);
  return known;
}

template <int count, class Function>
double integral(double from, double to, const Function& function) {
  if (!(from < to)) return 0;
  const double middle = (from + to) / 2, half = (to - from) / 2;
  double sum = 0;
  for (const auto& node : nodes<count>()) sum += node.weight * function(middle + half * node.x);
  return half * sum;
}

/// Density of s / sigma, the square root of chi-squared over its `df`.
class ChiDensity {
 public:
  explicit ChiDensity(double df)
      : df_(df), log_constant_(std::numbers::ln2 + df / 2 * std::log(df / 2) - log_gamma(df / 2)) {}
  double operator()(double u) const {
    return u > 0 ? std::exp(log_constant_ + (df_ - 1) * std::log(u) - df_ * u * u / 2) : 0;
  }
  [[nodiscard]] double from() const { return std::max(0.0, 1 - kFarTail / std::sqrt(2 * df_)); }
  [[nodiscard]] double to() const { return 1 + kFarTail / std::sqrt(2 * df_); }

 private:
  double df_, log_constant_;
};

/// What one level leaves to the error of the mean, when the slope has the error `z` of its sds and s is `u`
/// sigma: from -room - offset - lean z to room - offset - lean z, room = allowable - width u.
struct Strip {
  double allowable = 0, width = 0, offset = 0, lean = 0;

  [[nodiscard]] double upper(double u, double z) const { return allowable - width * u - offset - lean * z; }
  [[nodiscard]] double lower(double u, double z) const { return width * u - allowable - offset - lean * z; }
};

/// P(the error of the mean, of this sd, lies in all strips) for one u and z.
double chance_in_strips(std::span<const Strip> strips, double sd, double u, double z) {
  double high = strips.front().upper(u, z), low = strips.front().lower(u, z);
  for (const Strip& strip : strips.subspan(1)) {
    high = std::min(high, strip.upper(u, z));
    low = std::max(low, strip.lower(u, z));
  }
  return high > low ? normal_cdf(high / sd) - normal_cdf(low / sd) : 0;
}

/// Where lines a - b z and c - d z cross, if within what counts.
void add_crossing(double a, double b, double c, double d, std::vector<double>& kinks) {
  if (!(std::abs(b - d) > 0)) return;
  const double z = (a - c) / (b - d);
  if (std::abs(z) < kFarTail) kinks.push_back(z);
}

/// Where the chance as a function of z has a kink: other strips begin to bind, or nothing is left.
std::vector<double> kinks_of(std::span<const Strip> strips, double u) {
  std::vector<double> kinks{-kFarTail, kFarTail};
  for (std::size_t i = 0; i < strips.size(); ++i)
    for (std::size_t j = 0; j < strips.size(); ++j) {
      const Strip &a = strips[i], &b = strips[j];
      add_crossing(a.upper(u, 0), a.lean, b.lower(u, 0), b.lean, kinks);
      if (j <= i) continue;
      add_crossing(a.upper(u, 0), a.lean, b.upper(u, 0), b.lean, kinks);
      add_crossing(a.lower(u, 0), a.lean, b.lower(u, 0), b.lean, kinks);
    }
  std::sort(kinks.begin(), kinks.end());
  return kinks;
}

double chance_over_slopes(std::span<const Strip> strips, double sd, double u) {
  const auto at = [&](double z) { return classical::normal_density(z) * chance_in_strips(strips, sd, u, z); };
  const std::vector<double> kinks = kinks_of(strips, u);
  double sum = 0;
  for (std::size_t i = 1; i < kinks.size(); ++i) {
    // Long pieces are cut so that the density is well followed.
    const int parts = 1 + static_cast<int>((kinks[i] - kinks[i - 1]) / 4);
    const double part = (kinks[i] - kinks[i - 1]) / parts;
    for (int k = 0; k < parts; ++k)
      sum += integral<kSlopeNodes>(kinks[i - 1] + k * part, kinks[i - 1] + (k + 1) * part, at);
  }
  return sum;
}

/// The largest s over sigma at which every strip has room left.
double largest_sd(std::span<const Strip> strips, double at_most) {
  for (const Strip& strip : strips) at_most = std::min(at_most, strip.allowable / strip.width);
  return at_most;
}

/// The strips about the level at which the errors of mean and slope are uncorrelated, and the sd of the mean
/// there.
struct Strips {
  std::vector<Strip> strips;
  double sd = 0;
};

Strips strips_of(const ExpectedLine& line, std::span<const ProofAim> aims, double bias, double t) {
  const LineCovariance& v = line.covariance;
  const double center = v.slope > 0 ? line.mean_x - v.mean_slope / v.slope : line.mean_x;
  Strips all;
  all.sd = std::sqrt(v.difference_at(center - line.mean_x));
  for (const ProofAim& aim : aims) {
    const double se = std::sqrt(v.difference_at(aim.level - line.mean_x));
    all.strips.push_back({aim.allowable, t * se, bias + (line.slope - 1) * (aim.level - line.mean_x),
                          std::sqrt(v.slope) * (aim.level - center)});
  }
  return all;
}
}  // namespace

std::vector<ProofAim> proof_aims(const Measurand& measurand) {
  std::vector<ProofAim> aims;
  if (!measurand.allowable) return aims;
  for (const double level : measurand.decision_levels)
    aims.push_back({level, measurand.allowable->at(level)});
  return aims;
}

double power_of_two_tests(double allowable, double bias, double se, double df, double tail) {
  if (!(std::isfinite(se) && se > 0 && std::isfinite(df) && df > 0))
    throw std::invalid_argument(
        "power_of_two_tests: expected a positive standard error and degrees of freedom");
  const double width = t_quantile_of_tail(tail, df) * se;
  const ChiDensity density(df);
  const auto at = [&](double u) {
    const double room = allowable - width * u;
    return density(u) * (normal_cdf((room - bias) / se) - normal_cdf((-room - bias) / se));
  };
  return integral<kChiNodes>(density.from(), std::min(density.to(), allowable / width), at);
}

ProofPower proof_power(const PairConditions& conditions, std::span<const ProofAim> aims, FitMethod fit,
                       double bias, int pairs) {
  require_valid(conditions);
  if (pairs < 3) throw std::invalid_argument("pairs: expected at least 3");
  ProofPower power;
  power.levels.resize(aims.size());
  for (const ProofAim& aim : aims)
    power.covered.push_back(conditions.samples.chance_to_cover(aim.level, pairs));
  const ExpectedLine line = expected_line(conditions, fit, pairs);
  if (!line.exists || aims.empty()) return power;
  const double df = pairs - 2;
  const Strips all = strips_of(line, aims, bias, t_quantile_of_tail(kPlainTail, df));
  for (std::size_t i = 0; i < aims.size(); ++i) {
    const double se = std::sqrt(line.covariance.difference_at(aims[i].level - line.mean_x));
    power.levels[i] = power_of_two_tests(aims[i].allowable, all.strips[i].offset, se, df, kPlainTail);
  }
  if (aims.size() == 1) {
    power.all = power.levels.front();
    return power;
  }
  const ChiDensity density(df);
  const auto at = [&](double u) { return density(u) * chance_over_slopes(all.strips, all.sd, u); };
  power.all = integral<kChiNodes>(density.from(), largest_sd(all.strips, density.to()), at);
  return power;
}

}  // namespace agreed::plan
