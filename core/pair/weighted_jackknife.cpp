#include "core/pair/weighted_jackknife.hpp"

#include <algorithm>
#include <cmath>
#include <vector>

namespace agreed {
namespace {
using Parameters = LineParameters;

constexpr int kCorrections = 3;         // of Newton's method, after which nothing changes any more
constexpr double kDecides = 0.25;       // what a pair must leave of the determinant
constexpr double kSmall = 0.4;          // standard errors that a pair may move the line by
constexpr double kSettled = 1e-4;       // of that, left after the last correction
constexpr double kLeastSize = 1e-7;     // of a standard error, for lines without scatter
constexpr double kLogRatioStep = 1e-3;  // of ln(lambda)

Pull operator+(Pull a, Pull b) {
  return {a.mean + b.mean, a.slope + b.slope};
}
Pull operator-(Pull a, Pull b) {
  return {a.mean - b.mean, a.slope - b.slope};
}
Pull operator*(double f, Pull p) {
  return {f * p.mean, f * p.slope};
}

// Derivatives of two sums with respect to the two parameters.
struct Matrix {
  Pull by_mean, by_slope;

  [[nodiscard]] double determinant() const {
    return by_mean.mean * by_slope.slope - by_slope.mean * by_mean.slope;
  }
  [[nodiscard]] Parameters solve(Pull right) const {
    const double inverse = 1 / determinant();
    return {(right.mean * by_slope.slope - by_slope.mean * right.slope) * inverse,
            (by_mean.mean * right.slope - right.mean * by_mean.slope) * inverse};
  }
};
Matrix operator-(const Matrix& a, const Matrix& b) {
  return {a.by_mean - b.by_mean, a.by_slope - b.by_slope};
}

// The sums over all pairs to second order about the fit, and the derivatives of each pair's own part.
struct Expansion {
  Parameters at;
  Pull rest;  // what is left of the sums at the fit
  Matrix first;
  Pull mean_mean, mean_slope, slope_slope;  // second derivatives
  std::vector<Matrix> own;

  [[nodiscard]] Pull change(Parameters d) const {
    const double a = d.at_origin, b = d.slope;
    return rest + a * first.by_mean + b * first.by_slope + (0.5 * a * a) * mean_mean + (a * b) * mean_slope +
           (0.5 * b * b) * slope_slope;
  }
};

Pull total(const WeightedPairs& pairs, Parameters at) {
  Pull sum;
  for (std::size_t i = 0; i < pairs.size(); ++i) sum = sum + pairs.pull(i, at);
  return sum;
}

Expansion expand(const WeightedPairs& pairs, Parameters at, Parameters step) {
  const double ha = step.at_origin, hb = step.slope;
  Expansion e;
  e.at = at;
  e.own.reserve(pairs.size());
  Pull up_a, down_a, up_b, down_b;
  for (std::size_t i = 0; i < pairs.size(); ++i) {
    const Pull ua = pairs.pull(i, {at.at_origin + ha, at.slope});
    const Pull da = pairs.pull(i, {at.at_origin - ha, at.slope});
    const Pull ub = pairs.pull(i, {at.at_origin, at.slope + hb});
    const Pull db = pairs.pull(i, {at.at_origin, at.slope - hb});
    e.own.push_back({(0.5 / ha) * (ua - da), (0.5 / hb) * (ub - db)});
    up_a = up_a + ua;
    down_a = down_a + da;
    up_b = up_b + ub;
    down_b = down_b + db;
  }
  e.rest = total(pairs, at);
  const Pull both = total(pairs, {at.at_origin + ha, at.slope + hb});
  e.first = {(0.5 / ha) * (up_a - down_a), (0.5 / hb) * (up_b - down_b)};
  e.mean_mean = (1 / (ha * ha)) * (up_a + down_a - 2 * e.rest);
  e.slope_slope = (1 / (hb * hb)) * (up_b + down_b - 2 * e.rest);
  // What one step in both does beyond the steps in each.
  e.mean_slope = (1 / (ha * hb)) * (both - up_a - up_b + e.rest);
  return e;
}

// Standard errors of the parameters, those of the observed scatter; never nothing.
Parameters sizes_of(const WeightedLine& fit) {
  const double scale = fit.n > 2 ? std::max(0.0, fit.scale()) : 0;
  return {std::max(std::sqrt(scale * fit.covariance.mean), kLeastSize * std::sqrt(fit.x_spread)),
          std::max(std::sqrt(scale * fit.covariance.slope), kLeastSize)};
}

Parameters times(double factor, Parameters p) {
  return {factor * p.at_origin, factor * p.slope};
}

// Newton's method near the fit; nothing when the pair moves the line out of what the expansion is good for.
std::optional<Parameters> small_change_without(const WeightedPairs& pairs, const Expansion& e,
                                               Parameters most, std::size_t i) {
  const Matrix others = e.first - e.own[i];
  if (!(others.determinant() > kDecides * e.first.determinant())) return std::nullopt;
  Parameters d = others.solve(pairs.pull(i, e.at) - e.rest), more;
  for (int k = 0; k < kCorrections; ++k) {
    const Pull own = pairs.pull(i, {e.at.at_origin + d.at_origin, e.at.slope + d.slope});
    more = others.solve(own - e.change(d));
    d = {d.at_origin + more.at_origin, d.slope + more.slope};
  }
  const bool small = std::abs(d.at_origin) <= most.at_origin && std::abs(d.slope) <= most.slope;
  const bool settled =
      std::abs(more.at_origin) <= kSettled * most.at_origin && std::abs(more.slope) <= kSettled * most.slope;
  return small && settled ? std::optional(d) : std::nullopt;
}

std::optional<Parameters> change_by_refit(const WeightedPairs& pairs, Parameters line, std::size_t i) {
  const auto refit = pairs.solve(line, i);
  if (!refit.reason.empty()) return std::nullopt;
  return Parameters{refit.line.at_origin - line.at_origin, refit.line.slope - line.slope};
}

// (n-1)/n times the sum of squares and products about the mean, of changes turned to the line at mean_x.
class Spread {
 public:
  explicit Spread(double offset) : offset_(offset) {}
  void add(Parameters d) {
    const double a = d.at_origin + offset_ * d.slope, b = d.slope;
    n_ += 1;
    a_ += a;
    b_ += b;
    aa_ += a * a;
    ab_ += a * b;
    bb_ += b * b;
  }
  [[nodiscard]] std::optional<LineCovariance> covariance() const {
    if (!(std::isfinite(aa_) && std::isfinite(bb_))) return std::nullopt;
    const double factor = (n_ - 1) / n_;
    return LineCovariance{factor * (aa_ - a_ * a_ / n_), factor * (ab_ - a_ * b_ / n_),
                          factor * (bb_ - b_ * b_ / n_)};
  }

 private:
  double offset_, n_ = 0, a_ = 0, b_ = 0, aa_ = 0, ab_ = 0, bb_ = 0;
};

WeightedPairs with_ratio_times(const WeightedPairs& pairs, double factor) {
  ErrorLaw law = pairs.weighing().law();
  law.lambda *= factor;
  law.x.at_zero *= factor;
  law.x.relative *= factor;
  return pairs.with(law);
}
}  // namespace

std::optional<WeightedErrors> weighted_errors(const WeightedPairs& pairs, const WeightedLine& fit) {
  const Parameters line = pairs.weighing().parameters_of(fit.line);
  const Parameters sizes = sizes_of(fit), most = times(kSmall, sizes);
  // A pair moves the line by about a standard error over sqrt(n).
  const Expansion expansion = expand(pairs, line, times(0.5 / std::sqrt(static_cast<double>(fit.n)), sizes));
  const double offset = fit.line.mean_x - pairs.weighing().origin().x;
  Spread spread(offset);
  for (std::size_t i = 0; i < pairs.size(); ++i) {
    auto change = small_change_without(pairs, expansion, most, i);
    if (!change) change = change_by_refit(pairs, line, i);
    if (!change) return std::nullopt;
    spread.add(*change);
  }
  const auto jackknife = spread.covariance();
  if (!jackknife) return std::nullopt;
  const Pull more = total(with_ratio_times(pairs, std::exp(kLogRatioStep)), line);
  const Pull less = total(with_ratio_times(pairs, std::exp(-kLogRatioStep)), line);
  const Parameters turn = expansion.first.solve((-0.5 / kLogRatioStep) * (more - less));
  const double at_mean = turn.at_origin + offset * turn.slope;
  return WeightedErrors{*jackknife, {at_mean * at_mean, at_mean * turn.slope, turn.slope * turn.slope}};
}

std::optional<LineCovariance> jackknife_by_refits(const WeightedPairs& pairs, const WeightedLine& fit) {
  const Parameters line = pairs.weighing().parameters_of(fit.line);
  Spread spread(fit.line.mean_x - pairs.weighing().origin().x);
  for (std::size_t i = 0; i < pairs.size(); ++i) {
    const auto change = change_by_refit(pairs, line, i);
    if (!change) return std::nullopt;
    spread.add(*change);
  }
  return spread.covariance();
}

}  // namespace agreed
