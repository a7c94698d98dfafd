#include "core/pair/pair_chart.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>

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
// Splits whose log-likelihood is within this of the best are not told apart from it.
constexpr double kLikelihoodDrop = 3;

// Sums of v and w over the pairs before a split, both relative to their means over all pairs.
struct Sums {
  double n = 0, v = 0, w = 0, vw = 0, ww = 0;

  void add(double residual, double fitted) {
    n += 1;
    v += residual;
    w += fitted;
    vw += residual * fitted;
    ww += fitted * fitted;
  }
  Sums rest_of(const Sums& all) const { return {all.n - n, all.v - v, all.w - w, all.vw - vw, all.ww - ww}; }
};

// Explained sum of squares of v (about zero) by a line in w on each of two sides.
double explained(const Sums& a, const Sums& b, double least_spread) {
  const double ia = 1 / a.n, ib = 1 / b.n;
  const double means = a.v * a.v * ia + b.v * b.v * ib;
  const double spread_a = a.ww - a.w * a.w * ia, spread_b = b.ww - b.w * b.w * ib;
  const double product_a = a.vw - a.v * a.w * ia, product_b = b.vw - b.v * b.w * ib;
  if (spread_a > least_spread && spread_b > least_spread)
    return means +
           (product_a * product_a * spread_b + product_b * product_b * spread_a) / (spread_a * spread_b);
  if (spread_a > least_spread) return means + product_a * product_a / spread_a;
  if (spread_b > least_spread) return means + product_b * product_b / spread_b;
  return means;
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
  std::vector<double> before;  ///< sum of v before it
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
  const double b = line.slope;

  Scan scan;
  Sums side;  // begins with the block, whose sums follow for any line since v and w are linear in x and y
  if (block_.n > 0) {
    const Moments& m = block_;
    const Point c = all_.centred({m.origin.x + m.mean.x, m.origin.y + m.mean.y});
    const double v = line.residual(c), w = delta * c.x + b * c.y, count = m.n;
    side = {count, count * v, count * w,
            (delta - b * b) * m.sxy - delta * b * m.sxx + b * m.syy + count * v * w,
            delta * delta * m.sxx + 2 * delta * b * m.sxy + b * b * m.syy + count * w * w};
    scan.residual = std::max(0.0, m.syy - 2 * b * m.sxy + b * b * m.sxx) + count * v * v;
  }
  const std::size_t kept = newest_.size();
  std::vector<Point> vw(kept);
  Sums total = side;
  for (std::size_t i = 0; i < kept; ++i) {
    const Point c = all_.centred(newest_[i].point);
    vw[i] = {line.residual(c), delta * c.x + b * c.y};
    total.add(vw[i].x, vw[i].y);
    scan.residual += vw[i].x * vw[i].x;
  }
  const double least_spread = kNoSpread * total.ww;
  const double about_one_line = total.v * total.v / total.n;
  scan.first = std::max(kLeastBefore, block_.n);
  scan.gains.reserve(kept);
  scan.before.reserve(kept);
  for (std::size_t i = 0; i <= kept; ++i) {
    const int k = block_.n + static_cast<int>(i);
    if (k > n - kLeastAfter) break;
    if (k >= kLeastBefore) {
      scan.gains.push_back(explained(side, side.rest_of(total), least_spread) - about_one_line);
      scan.before.push_back(side.v);
    }
    if (i < kept) side.add(vw[i].x, vw[i].y);
  }
  if (scan.gains.empty()) return std::nullopt;
  const auto best = std::max_element(scan.gains.begin(), scan.gains.end());
  scan.best = static_cast<std::size_t>(best - scan.gains.begin());
  scan.sum = total.v;
  scan.least = (n - kSpentDegrees) * least_variance(all_, b, resolution_);
  return scan;
}

std::optional<double> PairChart::evidence(double delta) const {
  const auto found = scan(delta);
  if (!found) return std::nullopt;
  const double gain = std::max(0.0, found->gains[found->best]);
  const double rest = std::max(found->residual - gain, found->least);
  if (!(rest > 0)) return 0;
  return 0.5 * (all_.n - kSpentDegrees) * std::log1p(gain / rest);
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
  split.before = found->first + static_cast<int>(found->best);
  split.after = all_.n - split.before;
  split.evidence = evidence(delta).value_or(0);
  const double v_before = found->before[found->best];
  split.shift = (found->sum - v_before) / split.after - v_before / split.before;
  split.started_at = first_after(split.before);
  const double best = log_likelihood_gain(*found, found->gains[found->best]);
  std::size_t first = found->best, last = found->best;
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
