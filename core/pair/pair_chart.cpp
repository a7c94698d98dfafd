#include "core/pair/pair_chart.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>
#include <utility>

#include "core/base/distributions.hpp"
#include "core/pair/deming.hpp"
#include "core/pair/window_fit.hpp"

namespace agreed {
namespace {
constexpr int kLeastPairs = 7;
constexpr int kLeastBefore = 4;
constexpr int kLeastAfter = 3;
constexpr int kSpentDegrees = 5;
// A side whose spread of fitted values is below this part of the whole has no slope of its own.
constexpr double kNoSpread = 1e-12;
constexpr double kEndless = 1e300;
// Splits whose log-likelihood is within this of the best are not told apart from it.
constexpr double kLikelihoodDrop = 3;

// Sums of v and w over the pairs before a split, both relative to their means over all pairs.
struct Sums {
  double v = 0, w = 0, vw = 0, ww = 0, vv = 0;

  void add(double residual, double fitted) {
    v += residual;
    w += fitted;
    vw += residual * fitted;
    ww += fitted * fitted;
    vv += residual * residual;
  }
};

// Sums of the older block, which follow for any line since v and w are linear in x and y.
Sums sums_of_block(const Moments& block, const Moments& all, const DemingLine& line) {
  if (block.n == 0) return {};
  const double b = line.slope, delta = line.delta, n = block.n;
  const Point c = all.centred({block.origin.x + block.mean.x, block.origin.y + block.mean.y});
  const double v = line.residual(c), w = delta * c.x + b * c.y;
  const double sxx = block.sxx, sxy = block.sxy, syy = block.syy;
  return {n * v, n * w, (delta - b * b) * sxy - delta * b * sxx + b * syy + n * v * w,
          delta * delta * sxx + 2 * delta * b * sxy + b * b * syy + n * w * w,
          std::max(0.0, syy - 2 * b * sxy + b * b * sxx) + n * v * v};
}

// The sums before each split, one array a kind: the gains are then worked out several at a time.
struct Prefixes {
  std::vector<double> v, w, vw, ww;

  explicit Prefixes(std::size_t most) {
    for (auto* sums : {&v, &w, &vw, &ww}) sums->reserve(most);
  }
  void push_back(const Sums& sums) {
    v.push_back(sums.v);
    w.push_back(sums.w);
    vw.push_back(sums.vw);
    ww.push_back(sums.ww);
  }
};

// Gain in the explained sum of squares of v by a line in w on each side of a split over none, for the splits
// that have `first`, first + 1, ... of n pairs before them. No branches, so that the loop runs in vectors: a
// side without spread gets an endless denominator instead.
std::vector<double> gains_of(const Prefixes& before, const Sums& all, int first, int n, std::size_t splits) {
  const double least_spread = kNoSpread * all.ww;
  const double about_one_line = all.v * all.v / n;
  std::vector<double> gains(splits);
  for (std::size_t i = 0; i < splits; ++i) {
    const double k = first + static_cast<int>(i);
    const double ia = 1 / k, ib = 1 / (n - k);
    const double va = before.v[i], wa = before.w[i], vb = all.v - va, wb = all.w - wa;
    const double spread_a = before.ww[i] - wa * wa * ia, spread_b = (all.ww - before.ww[i]) - wb * wb * ib;
    const double product_a = before.vw[i] - va * wa * ia, product_b = (all.vw - before.vw[i]) - vb * wb * ib;
    const double slope_a = product_a * product_a / (spread_a > least_spread ? spread_a : kEndless);
    const double slope_b = product_b * product_b / (spread_b > least_spread ? spread_b : kEndless);
    gains[i] = va * va * ia + vb * vb * ib + slope_a + slope_b - about_one_line;
  }
  return gains;
}
}  // namespace

double evidence_of_score(double h) {
  return -std::log(2 * normal_tail(h));
}

double score_of_evidence(double evidence) {
  return normal_score_of_tail(std::exp(-evidence) / 2);
}

struct PairChart::Scan {
  int first = 0;               ///< pairs before the first split looked at
  std::vector<double> gains;   ///< G of each split from there on
  std::vector<double> before;  ///< sum of v before it; goes on to the split before the newest pair
  double residual = 0;         ///< S_v
  double least = 0;            ///< S_v - G is never taken below this
  double sum = 0;              ///< of v over all pairs: zero but for rounding
  std::size_t best = 0;
};

PairChart::PairChart(int split_memory, double resolution)
    : memory_(static_cast<std::size_t>(split_memory)), resolution_(resolution) {
  if (split_memory < 1) throw std::invalid_argument("split_memory must be at least 1");
  newest_.reserve(memory_ + 1);
}

void PairChart::insert(Point point, Instant at, int later) {
  all_.add(point);
  newest_.insert(newest_.end() - later, Entry{point, at});
  if (newest_.size() > memory_) {
    block_.add(newest_.front().point);
    newest_.erase(newest_.begin());
  }
}

void PairChart::restart(int n) {
  newest_.erase(newest_.begin(), newest_.end() - n);
  all_ = block_ = Moments();
  for (const Entry& entry : newest_) all_.add(entry.point);
}

std::optional<PairChart::Scan> PairChart::scan(double delta) const {
  const int n = all_.n;
  if (n < kLeastPairs) return std::nullopt;
  const DemingLine line = deming_line(all_, delta);
  if (!line.exists() || !(line.slope > 0)) return std::nullopt;

  Scan scan;
  scan.first = std::max(kLeastBefore, block_.n);
  Sums sums = sums_of_block(block_, all_, line);
  Prefixes before(newest_.size());
  int k = block_.n;
  for (const Entry& entry : newest_) {
    if (k++ >= kLeastBefore) before.push_back(sums);
    const Point c = all_.centred(entry.point);
    sums.add(line.residual(c), delta * c.x + line.slope * c.y);
  }
  const int splits = n - kLeastAfter - scan.first + 1;
  if (splits < 1) return std::nullopt;
  scan.gains = gains_of(before, sums, scan.first, n, static_cast<std::size_t>(splits));
  scan.before = std::move(before.v);
  scan.residual = sums.vv;
  scan.sum = sums.v;
  scan.best =
      static_cast<std::size_t>(std::max_element(scan.gains.begin(), scan.gains.end()) - scan.gains.begin());
  scan.least = (n - kSpentDegrees) * least_variance(all_, line.slope, resolution_);
  return scan;
}

std::optional<double> PairChart::evidence(double delta) const {
  const auto found = scan(delta);
  return found ? std::optional(evidence_of(*found)) : std::nullopt;
}

double PairChart::evidence_of(const Scan& scan) const {
  const double gain = std::max(0.0, scan.gains[scan.best]);
  const double rest = std::max(scan.residual - gain, scan.least);
  if (!(rest > 0)) return 0;
  return 0.5 * (all_.n - kSpentDegrees) * std::log1p(gain / rest);
}

// A large step signals while fewer pairs than a line needs have come after it; the best split then lies at
// the last one looked at, and the mean alone tells which of that and the later ones it is.
std::size_t PairChart::start_of(const Scan& scan) const {
  if (scan.best + 1 < scan.gains.size()) return scan.best;
  std::size_t best = scan.best;
  double largest = -1;
  for (std::size_t i = scan.best; i < scan.before.size(); ++i) {
    const double k = scan.first + static_cast<double>(i), v = scan.before[i], rest = scan.sum - v;
    const double gain = v * v / k + rest * rest / (all_.n - k);
    if (gain <= largest) continue;
    largest = gain;
    best = i;
  }
  return best;
}

double PairChart::log_likelihood_gain(const Scan& scan, double gain) const {
  const double rest = std::max(scan.residual - std::max(0.0, gain), scan.least);
  return rest > 0 ? -0.5 * all_.n * std::log(rest) : 0;
}

Instant PairChart::first_after(int split) const {
  return newest_[static_cast<std::size_t>(split - block_.n)].at;
}

std::optional<Split> PairChart::best_split(double delta) const {
  const auto found = scan(delta);
  if (!found) return std::nullopt;
  Split split;
  const std::size_t start = start_of(*found);
  split.before = found->first + static_cast<int>(start);
  split.after = all_.n - split.before;
  split.evidence = evidence_of(*found);
  const double v_before = found->before[start];
  split.shift = (found->sum - v_before) / split.after - v_before / split.before;
  split.started_at = first_after(split.before);
  const double best = log_likelihood_gain(*found, found->gains[found->best]);
  std::size_t first = found->best, last = start;
  for (std::size_t i = 0; i < found->gains.size(); ++i)
    if (log_likelihood_gain(*found, found->gains[i]) >= best - kLikelihoodDrop) {
      first = std::min(first, i);
      last = std::max(last, i);
    }
  split.started_between = {first_after(found->first + static_cast<int>(first)),
                           first_after(found->first + static_cast<int>(last))};
  return split;
}

}  // namespace agreed
