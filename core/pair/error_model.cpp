#include "core/pair/error_model.hpp"

#include <algorithm>
#include <cmath>
#include <iterator>
#include <vector>

namespace agreed {
namespace {
constexpr double kApart = 1.2;  // two levels tell a constant from a growing part when their ratio is this
constexpr int kCells = 16;      // cells of [0, 1] in which an extremum of the likelihood is looked for
constexpr int kHalvings = 60;

// One standard as the likelihood of the mixed model sees it; its level squared over the mean of all.
struct Say {
  double df, variance, square;
};

double weighted_mean_square_level(std::span<const Repeatability> standards) {
  double sum = 0, df = 0;
  for (const Repeatability& s : standards) {
    sum += s.degrees_of_freedom * s.mean * s.mean;
    df += s.degrees_of_freedom;
  }
  return sum / df;
}

// variance = k g with g = 1 - p + p square, p the share of the growing part; k is profiled out.
struct Profile {
  std::span<const Say> says;
  double df = 0;

  double scale(double p) const {
    double sum = 0;
    for (const Say& s : says) sum += s.df * s.variance / (1 - p + p * s.square);
    return sum / df;
  }
  // -2 ln(likelihood) but for a constant.
  double badness(double p) const {
    double sum = df * std::log(scale(p));
    for (const Say& s : says) sum += s.df * std::log(1 - p + p * s.square);
    return sum;
  }
  double slope(double p) const {
    double of_scale = 0, of_logs = 0;
    for (const Say& s : says) {
      const double g = 1 - p + p * s.square, turn = s.square - 1;
      of_scale += s.df * s.variance * turn / (g * g);
      of_logs += s.df * turn / g;
    }
    return of_logs - of_scale / scale(p);
  }
  double root_between(double low, double high) const {
    for (int i = 0; i < kHalvings; ++i) {
      const double middle = (low + high) / 2;
      (slope(middle) < 0 ? low : high) = middle;
    }
    return (low + high) / 2;
  }
};

double best_share(const Profile& profile, double most) {
  double best = 0, least = profile.badness(0);
  const auto consider = [&](double p) {
    const double badness = profile.badness(p);
    if (!(badness < least)) return;
    best = p;
    least = badness;
  };
  double slope_before = profile.slope(0);
  for (int i = 1; i <= kCells; ++i) {
    const double low = most * (i - 1) / kCells, high = most * i / kCells;
    const double slope = profile.slope(high);
    if (slope_before < 0 && slope >= 0) consider(profile.root_between(low, high));
    slope_before = slope;
  }
  consider(most);
  return best;
}

// The inverse of the information sum nu/(2 V^2) (1, L^2)'(1, L^2).
void add_uncertainty(std::span<const Repeatability> standards, ErrorModel& model) {
  double aa = 0, ab = 0, bb = 0;
  for (const Repeatability& s : standards) {
    const double v = model.variance_at(s.mean), square = s.mean * s.mean;
    const double weight = s.degrees_of_freedom / (2 * v * v);
    aa += weight;
    ab += weight * square;
    bb += weight * square * square;
  }
  const double determinant = aa * bb - ab * ab;
  if (!(determinant > 0)) return;
  model.at_zero_variance = bb / determinant;
  model.covariance = -ab / determinant;
  model.relative_variance = aa / determinant;
}

void fit_mixed(std::span<const Repeatability> standards, ErrorModel& model) {
  const double mean_square = weighted_mean_square_level(standards);
  const auto [least, most] = std::minmax_element(
      standards.begin(), standards.end(),
      [](const Repeatability& a, const Repeatability& b) { return std::abs(a.mean) < std::abs(b.mean); });
  if (!(std::abs(most->mean) > kApart * std::abs(least->mean))) {
    model.reason = no_model::one_level;
    return;
  }
  std::vector<Say> says;
  Profile profile;
  for (const Repeatability& s : standards) {
    says.push_back({s.degrees_of_freedom, s.variance, s.mean * s.mean / mean_square});
    profile.df += s.degrees_of_freedom;
  }
  profile.says = says;
  model.at_zero = model.relative = 0;
  if (!(profile.scale(0) > 0)) return;
  // A standard at level zero has a variance only from the constant part.
  const bool down_to_zero = says[static_cast<std::size_t>(least - standards.begin())].square < 1e-6;
  const double share = best_share(profile, down_to_zero ? 1 - 1e-6 : 1);
  const double scale = profile.scale(share);
  model.at_zero = scale * (1 - share);
  model.relative = scale * share / mean_square;
  add_uncertainty(standards, model);
}
}  // namespace

double ErrorModel::degrees_of_freedom_at(double level) const {
  const double v = variance_at(level), square = level * level;
  const double variance = at_zero_variance + square * (2 * covariance + square * relative_variance);
  return variance > 0 ? 2 * v * v / variance : 0;
}

ErrorModel fit_error_model(ErrorGrowth growth, std::span<const Repeatability> standards) {
  ErrorModel model;
  model.growth = growth;
  std::vector<Repeatability> known;
  std::copy_if(standards.begin(), standards.end(), std::back_inserter(known),
               [](const Repeatability& s) { return s.known(); });
  if (known.empty()) {
    model.reason = no_model::not_known;
    return model;
  }
  if (growth == ErrorGrowth::mixed) {
    fit_mixed(known, model);
    return model;
  }
  double sum = 0, df = 0;
  for (const Repeatability& s : known) {
    const double square = growth == ErrorGrowth::constant ? 1 : s.mean * s.mean;
    if (!(square > 0)) model.reason = no_model::at_zero;
    sum += s.variance * s.degrees_of_freedom / square;
    df += s.degrees_of_freedom;
  }
  if (!model.exists()) return model;
  const double mean = sum / df, variance = 2 * mean * mean / df;
  const bool constant = growth == ErrorGrowth::constant;
  (constant ? model.at_zero : model.relative) = mean;
  (constant ? model.at_zero_variance : model.relative_variance) = variance;
  if (!constant) model.at_zero = 0;
  return model;
}

}  // namespace agreed
