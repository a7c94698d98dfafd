#include "core/chart/serial_correlation.hpp"

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

}  // namespace agreed
