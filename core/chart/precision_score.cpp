#include "core/chart/precision_score.hpp"

#include <algorithm>
#include <bit>
#include <cmath>
#include <cstdint>
#include <limits>

#include "core/base/wide_vectors.hpp"

namespace agreed {
namespace {
// Ratios beyond these count as these, so that single precision can hold them.
constexpr double kLeastRatio = 1e-30, kLargestRatio = 1e30;

struct Sides {
  const double* sum;
  const double* squares;
  const double* inverse_before;
  const double* inverse_after;
  const double* inverse_degrees_before;
  const double* inverse_degrees_after;
  int held;
  double carried, least_variance, all_sum, all_squares;

  explicit Sides(const Stretch& stretch)
      : sum(stretch.sum()),
        squares(stretch.squares()),
        inverse_before(stretch.inverse_before()),
        inverse_after(stretch.inverse_after()),
        inverse_degrees_before(stretch.inverse_degrees_before()),
        inverse_degrees_after(inverse_after + 1),
        held(static_cast<int>(stretch.held())),
        carried(stretch.carried().squares),
        // Without spread any positive floor makes every ratio 1.
        least_variance(stretch.has_spread() || stretch.carried().squares > 0
                           ? std::max(stretch.least_variance(), std::numeric_limits<double>::min())
                           : 1.0),
        all_sum(sum[held]),
        all_squares(squares[held]) {}

  [[nodiscard]] double ratio(int j) const {
    const double later = all_sum - sum[j];
    const double before =
        (squares[j] - sum[j] * sum[j] * inverse_before[j] + carried) * inverse_degrees_before[j];
    const double after =
        (all_squares - squares[j] - later * later * inverse_after[j]) * inverse_degrees_after[j];
    const double upper = after > least_variance ? after : least_variance;
    const double lower = before > least_variance ? before : least_variance;
    const double f = upper / lower;
    const double held_up = f > kLeastRatio ? f : kLeastRatio;
    return held_up < kLargestRatio ? held_up : kLargestRatio;
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

AGREED_WIDE_VECTORS
void rough_scores(const Sides& sides, int first, int end, float* rough) {
  constexpr float kTwoNinths = 2.0F / 9.0F;
  for (int j = first; j < end; ++j) {
    const float root = rough_cube_root(static_cast<float>(sides.ratio(j)));
    const float b = kTwoNinths * static_cast<float>(sides.inverse_degrees_before[j]);
    const float a = kTwoNinths * static_cast<float>(sides.inverse_degrees_after[j]);
    rough[j] = ((1 - b) * root - (1 - a)) / std::sqrt(b * root * root + a);
  }
}

PrecisionSplit best_split_of_replicates(const Stretch& stretch) {
  const Within carried = stretch.carried().within;
  const Within all = stretch.last().sums.within;
  const double floor = std::max(stretch.least_variance_within(), std::numeric_limits<double>::min());
  PrecisionSplit best{0, 0, -std::numeric_limits<double>::infinity(), 1};
  for (std::size_t j = 0; j < stretch.held(); ++j) {
    const Within before = stretch.within_before(j) + carried, after = all - stretch.within_before(j);
    if (after.degrees < 1) break;
    if (before.degrees < kLeastBeforeScatter - 1) continue;
    const auto variance = [floor](const Within& within) {
      return std::max(floor, within.squares / static_cast<double>(within.degrees));
    };
    const double ratio = std::clamp(variance(after) / variance(before), kLeastRatio, kLargestRatio);
    const double score = precision_score(ratio, before.degrees + 1, after.degrees + 1);
    if (score > best.score) best = {j, stretch.before(j), score, std::sqrt(ratio)};
  }
  return best;
}

bool splits_replicates(const Stretch& stretch) {
  const Within carried = stretch.carried().within;
  const Within all = stretch.last().sums.within;
  for (std::size_t j = stretch.held(); j-- > 0;)
    if (all.degrees > stretch.within_before(j).degrees)
      return carried.degrees + stretch.within_before(j).degrees >= kLeastBeforeScatter - 1;
  return false;
}

}  // namespace

std::size_t first_scatter_split(const Stretch& stretch) {
  // Of k readings k - 1 degrees of freedom; a first reading adds none to what is carried.
  const std::int64_t missing = kLeastBeforeScatter - stretch.carried().degrees;
  return stretch.first_split(missing > 1 ? missing : 0);
}

bool has_precision_splits(const Stretch& stretch) {
  if (stretch.by_replicates()) return splits_replicates(stretch);
  return stretch.held() >= 2 && first_scatter_split(stretch) + 2 <= stretch.held();
}

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
  if (stretch.by_replicates()) return best_split_of_replicates(stretch);
  const Sides sides(stretch);
  const auto first = static_cast<int>(first_scatter_split(stretch));
  const auto before = [&](int j) {
    const std::int64_t own = stretch.before(static_cast<std::size_t>(j));
    return stretch.carried().degrees + std::max<std::int64_t>(own, 1);
  };
  const int end = sides.held - 1;
  scratch.resize(static_cast<std::size_t>(end));
  float* rough = scratch.data();
  rough_scores(sides, first, end, rough);
  const float largest = *std::max_element(rough + first, rough + end);
  const float candidate = largest - (1e-3F + 2e-5F * std::abs(largest));

  const auto position = [](int j) { return static_cast<std::size_t>(j); };
  PrecisionSplit best{position(first), 0, -std::numeric_limits<double>::infinity(), 1};
  for (int j = first; j < end; ++j) {
    if (rough[j] < candidate) continue;
    const double ratio = sides.ratio(j);
    const double score = precision_score(ratio, before(j), sides.held - j);
    if (score > best.score) best = {position(j), stretch.before(position(j)), score, std::sqrt(ratio)};
  }
  return best;
}

}  // namespace agreed
