#include "core/chart/serial_correlation.hpp"

#include <algorithm>
#include <array>
#include <cmath>

namespace agreed {
namespace {
struct Lagged {
  double squares = 0, products = 0;
};

// Readings at positions first .. last about their mean.
Lagged about_mean(const double* deviation, std::size_t first, std::size_t last) {
  if (last < first) return {};
  double mean = 0;
  for (std::size_t j = first; j <= last; ++j)
    mean += (deviation[j] - mean) / static_cast<double>(j - first + 1);
  Lagged sums;
  for (std::size_t j = first; j <= last; ++j) {
    const double centred = deviation[j] - mean;
    sums.squares += centred * centred;
    if (j < last) sums.products += centred * (deviation[j + 1] - mean);
  }
  return sums;
}
}  // namespace

std::optional<double> serial_correlation(const Stretch& stretch, std::size_t end) {
  if (end < 3) return {};
  const Lagged sums = about_mean(stretch.deviation(), 1, end);
  if (!(sums.squares > 0)) return {};
  return sums.products / sums.squares;
}

double residual_correlation(const Stretch& stretch, std::size_t position) {
  const std::size_t held = stretch.held();
  const Lagged before = about_mean(stretch.deviation(), 1, position);
  const Lagged after = about_mean(stretch.deviation(), position + 1, held);
  const double squares = before.squares + after.squares;
  if (!(squares > 0)) return 0;
  const double r = (before.products + after.products) / squares;
  return std::clamp(r + (1 + 4 * r) / static_cast<double>(held), 0.0, 0.9);
}

double run_length_if_correlated(double lag_1) {
  constexpr std::array<double, 6> kLag = {0, 0.1, 0.2, 0.3, 0.4, 0.6};
  constexpr std::array<double, 6> kRunLength = {kUncorrelatedRunLength, 830, 400, 215, 120, 44};
  const double r = std::clamp(lag_1, kLag.front(), kLag.back());
  const auto upper = std::find_if(kLag.begin() + 1, kLag.end() - 1, [r](double lag) { return r <= lag; });
  const auto i = static_cast<std::size_t>(upper - kLag.begin());
  const double share = (r - kLag[i - 1]) / (kLag[i] - kLag[i - 1]);
  return std::exp((1 - share) * std::log(kRunLength[i - 1]) + share * std::log(kRunLength[i]));
}

}  // namespace agreed
