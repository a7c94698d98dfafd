#include "core/chart/precision_score.hpp"

#include <algorithm>
#include <bit>
#include <cmath>
#include <cstring>
#include <limits>

namespace agreed {
namespace {
// Ratios beyond these count as these, so that single precision can hold them.
constexpr double kLeastRatio = 1e-30, kLargestRatio = 1e30;

struct Sides {
  const double* sum;
  const double* squares;
  const double* inverse_before;
  const double* inverse_after;
  std::size_t held;
  double first_before, least_variance;

  explicit Sides(const Stretch& stretch)
      : sum(stretch.sum()),
        squares(stretch.squares()),
        inverse_before(stretch.inverse_before()),
        inverse_after(stretch.inverse_after()),
        held(stretch.held()),
        first_before(static_cast<double>(stretch.block())),
        // Without spread any positive floor makes every ratio 1.
        least_variance(stretch.has_spread() ? stretch.least_variance() : 1.0) {}

  [[nodiscard]] double ratio(std::size_t j) const {
    const double later = sum[held] - sum[j];
    const double before = squares[j] - sum[j] * sum[j] * inverse_before[j];
    const double after = squares[held] - squares[j] - later * later * inverse_after[j];
    const double degrees_before = first_before + static_cast<double>(static_cast<int>(j)) - 1;
    const double degrees_after = static_cast<double>(static_cast<int>(held - j)) - 1;
    const double floor = std::max(least_variance, std::numeric_limits<double>::min());
    const double upper = std::max(after, floor * degrees_after) * degrees_before;
    const double lower = std::max(before, floor * degrees_before) * degrees_after;
    return std::min(std::max(upper / lower, kLeastRatio), kLargestRatio);
  }
};

// Cube root to about 3e-6 relative: Newton's rule twice from a guess by the exponent. Loops over it run four
// splits at a time, which std::cbrt does not.
float rough_cube_root(float x) {
  constexpr float kThird = 1.0F / 3.0F;
  const auto bits = static_cast<float>(std::bit_cast<std::int32_t>(x));
  float root = std::bit_cast<float>(static_cast<std::int32_t>(bits * kThird) + 709921077);
  root = kThird * (2 * root + x / (root * root));
  return kThird * (2 * root + x / (root * root));
}
}  // namespace

double precision_score(double ratio, std::int64_t before, std::int64_t after) {
  const double a = 2 / (9 * static_cast<double>(after - 1));
  const double b = 2 / (9 * static_cast<double>(before - 1));
  const double root = std::cbrt(ratio);
  return ((1 - b) * root - (1 - a)) / std::sqrt(b * root * root + a);
}

double precision_limit(double h, std::int64_t before, std::int64_t after) {
  const double a = 2 / (9 * static_cast<double>(after - 1));
  const double b = 2 / (9 * static_cast<double>(before - 1));
  const double q2 = (1 - b) * (1 - b) - h * h * b;
  const double q1 = (1 - a) * (1 - b);
  const double q0 = (1 - a) * (1 - a) - h * h * a;
  if (!(q2 > 0)) return std::numeric_limits<double>::infinity();
  const double root = (q1 + std::sqrt(q1 * q1 - q2 * q0)) / q2;
  return root * root * root;
}

// Every split is scored roughly in single precision; those that may be the best are scored exactly. The rough
// score is off by less than 4e-6 (|z| + 45), since c / sqrt(a + b c^2) <= (|z| + 1/sqrt(a)) / (1 - b) and
// a >= 2/(9 split_memory).
PrecisionSplit best_precision_split(const Stretch& stretch, std::vector<float>& scratch) {
  const Sides sides(stretch);
  const std::size_t first = stretch.first_split(kLeastBeforeScatter), end = stretch.held() - 1;
  scratch.resize(end);
  float* rough = scratch.data();
  for (std::size_t j = first; j < end; ++j) {
    const float root = rough_cube_root(static_cast<float>(sides.ratio(j)));
    const double degrees_before = sides.first_before + static_cast<double>(static_cast<int>(j)) - 1;
    const float b = static_cast<float>(2.0 / 9.0) / static_cast<float>(degrees_before);
    const float a = static_cast<float>(2.0 / 9.0) / static_cast<float>(static_cast<int>(sides.held - j) - 1);
    rough[j] = ((1 - b) * root - (1 - a)) / std::sqrt(b * root * root + a);
  }
  const float largest = *std::max_element(rough + first, rough + end);
  const float candidate = largest - (1e-3F + 2e-5F * std::abs(largest));

  PrecisionSplit best{first, stretch.before(first), -std::numeric_limits<double>::infinity(), 1};
  for (std::size_t j = first; j < end; ++j) {
    if (rough[j] < candidate) continue;
    const double ratio = sides.ratio(j);
    const double score =
        precision_score(ratio, stretch.before(j), static_cast<std::int64_t>(stretch.held() - j));
    if (score > best.score) best = {j, stretch.before(j), score, std::sqrt(ratio)};
  }
  return best;
}

}  // namespace agreed
