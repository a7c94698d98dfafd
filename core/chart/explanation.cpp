#include "core/chart/explanation.hpp"

#include <cmath>
#include <vector>

#include "core/chart/precision_score.hpp"

namespace agreed {
namespace {
constexpr double kWithin = 3;  // log-likelihood units

double floor_of(const Stretch& stretch) {
  return std::max(stretch.least_variance(), std::numeric_limits<double>::min());
}

// Gains of all splits that leave enough readings on both sides for two variances; sums of squares about the
// mean of all or about the own mean of each side.
std::vector<double> gains_of_two_sds(const Stretch& stretch, std::size_t first, bool own_means) {
  const Sums all = stretch.last().sums;
  const double floor = floor_of(stretch);
  const double carried = stretch.carried().squares;
  const auto degrees = static_cast<double>(stretch.carried().degrees);
  const auto counted = static_cast<double>(stretch.counted());
  const double mean = all.sum / static_cast<double>(all.n);
  const double whole = counted / 2 * std::log(std::max(floor, (all.about_mean() + carried) / counted));
  std::vector<double> gains;
  for (std::size_t j = first; j + 2 <= stretch.held(); ++j) {
    const Sums before{stretch.before(j), stretch.sum()[j], stretch.squares()[j]}, after = all - before;
    const auto squares = [&](const Sums& side) {
      const auto m = static_cast<double>(side.n);
      return own_means ? side.about_mean() : side.squares - mean * (2 * side.sum - m * mean);
    };
    const auto m = static_cast<double>(after.n);
    const double k = static_cast<double>(before.n) + degrees;
    const double earlier = std::max(floor, (squares(before) + carried) / k);
    const double later = std::max(floor, squares(after) / m);
    const double gain = whole - k / 2 * std::log(earlier) - m / 2 * std::log(later);
    gains.push_back(later > earlier ? gain : -std::numeric_limits<double>::infinity());
  }
  return gains;
}

// The same of the variances within runs of replicates.
std::vector<double> gains_of_replicates(const Stretch& stretch) {
  const Within carried = stretch.carried().within, all = stretch.last().sums.within;
  const double floor = std::max(stretch.least_variance_within(), std::numeric_limits<double>::min());
  const auto variance = [floor](const Within& within) {
    return std::max(floor, within.squares / static_cast<double>(within.degrees));
  };
  const auto part = [&](const Within& within) {
    return static_cast<double>(within.degrees) / 2 * std::log(variance(within));
  };
  std::vector<double> gains;
  for (std::size_t j = 0; j < stretch.held(); ++j) {
    const Within before = stretch.within_before(j) + carried, after = all - stretch.within_before(j);
    const bool both = before.degrees >= kLeastBeforeScatter - 1 && after.degrees >= 1;
    gains.push_back(both && variance(after) > variance(before)
                        ? part(all + carried) - part(before) - part(after)
                        : -std::numeric_limits<double>::infinity());
  }
  return gains;
}

Explanation best_of(const std::vector<double>& gains, std::size_t first) {
  Explanation best;
  for (std::size_t i = 0; i < gains.size(); ++i)
    if (gains[i] > best.gain) best = {first + i, gains[i], 0, 0};
  return best;
}

void find_candidates(Explanation& best, const std::vector<double>& gains, std::size_t first) {
  best.first = best.last = best.position;
  for (std::size_t i = 0; i < gains.size(); ++i) {
    if (!(gains[i] >= best.gain - kWithin)) continue;
    best.first = std::min(best.first, first + i);
    best.last = std::max(best.last, first + i);
  }
}
}  // namespace

Explanation explain_by_two_means(const Stretch& stretch, const LevelSplit& best) {
  const auto n = static_cast<double>(best.count), counted = static_cast<double>(best.counted);
  const double floor = (counted - 2) * floor_of(stretch);
  const Sums all = stretch.last().sums;
  const double total = std::max(floor, all.about_mean() + stretch.carried().squares);
  const std::size_t first = first_level_split(stretch);
  std::vector<double> gains;
  for (std::size_t j = first; j < stretch.held(); ++j) {
    const double excess = stretch.sum()[j] - static_cast<double>(stretch.before(j)) * (all.sum / n);
    const double between = excess * excess * (stretch.inverse_before()[j] + stretch.inverse_after()[j]);
    gains.push_back(counted / 2 * std::log(total / std::max(floor, total - between)));
  }
  Explanation explanation;
  explanation.position = best.position;
  explanation.gain = gains[best.position - first];
  find_candidates(explanation, gains, first);
  return explanation;
}

Explanation explain_by_two_sds(const Stretch& stretch) {
  const std::size_t first = stretch.by_replicates() ? 0 : first_scatter_split(stretch);
  const std::vector<double> gains =
      stretch.by_replicates() ? gains_of_replicates(stretch) : gains_of_two_sds(stretch, first, false);
  Explanation best = best_of(gains, first);
  if (std::isfinite(best.gain)) find_candidates(best, gains, first);
  return best;
}

Explanation explain_by_two_normals(const Stretch& stretch) {
  const std::size_t first = first_scatter_split(stretch);
  return best_of(gains_of_two_sds(stretch, first, true), first);
}

}  // namespace agreed
