#include "core/pair/pair_chart.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>
#include <utility>

#include "core/base/distributions.hpp"
#include "core/base/wide_vectors.hpp"
#include "core/pair/deming.hpp"
#include "core/pair/window_fit.hpp"

namespace agreed {
namespace {
constexpr int kLeastPairsOnChart = 7;
constexpr int kLeastBefore = 4;
constexpr int kLeastAfter = 3;
constexpr int kSpentDegrees = 5;
constexpr int kSpentByLineAfter = 3;  // when the line before is known
// A side whose spread of fitted values is below this part of the whole has no slope of its own.
constexpr double kNoSpread = 1e-12;
constexpr double kEndless = 1e300;
// Splits whose log-likelihood is within this of the best are not told apart from it.
constexpr double kLikelihoodDrop = 3;

// Weighted sums of v and w over the pairs before a split; w is relative to its mean over all pairs.
struct ResidualSums {
  double weight = 0, v = 0, w = 0, vw = 0, ww = 0, vv = 0;

  void add(double its_weight, double residual, double fitted) {
    const double weighted_residual = its_weight * residual, weighted_fitted = its_weight * fitted;
    weight += its_weight;
    v += weighted_residual;
    w += weighted_fitted;
    vw += weighted_residual * fitted;
    ww += weighted_fitted * fitted;
    vv += weighted_residual * residual;
  }
};

// The sums before each split, one array a kind: the gains are then worked out several at a time.
struct Prefixes {
  std::vector<double> weight, v, w, vw, ww;

  explicit Prefixes(std::size_t most) {
    for (auto* sums : {&weight, &v, &w, &vw, &ww}) sums->reserve(most);
  }
  void push_back(const ResidualSums& sums) {
    weight.push_back(sums.weight);
    v.push_back(sums.v);
    w.push_back(sums.w);
    vw.push_back(sums.vw);
    ww.push_back(sums.ww);
  }
};

// Gain in the explained sum of squares of v by a line in w on each side of a split over none, for the first
// `splits` ones. No branches, so that the loop runs in vectors: a side without spread gets an endless
// denominator instead.
AGREED_WIDE_VECTORS
std::vector<double> gains_of(const Prefixes& before, const ResidualSums& all, std::size_t splits) {
  const double least_spread = kNoSpread * all.ww;
  const double about_one_line = all.v * all.v / all.weight;
  std::vector<double> gains(splits);
  for (std::size_t i = 0; i < splits; ++i) {
    const double ia = 1 / before.weight[i], ib = 1 / (all.weight - before.weight[i]);
    const double va = before.v[i], wa = before.w[i], vb = all.v - va, wb = all.w - wa;
    const double spread_a = before.ww[i] - wa * wa * ia, spread_b = (all.ww - before.ww[i]) - wb * wb * ib;
    const double product_a = before.vw[i] - va * wa * ia, product_b = (all.vw - before.vw[i]) - vb * wb * ib;
    const double slope_a = product_a * product_a / (spread_a > least_spread ? spread_a : kEndless);
    const double slope_b = product_b * product_b / (spread_b > least_spread ? spread_b : kEndless);
    gains[i] = va * va * ia + vb * vb * ib + slope_a + slope_b - about_one_line;
  }
  return gains;
}

// The same of an own line after the split over the established line, on which v is zero.
std::vector<double> gains_after(const Prefixes& before, const ResidualSums& all, std::size_t splits) {
  const double least_spread = kNoSpread * all.ww;
  std::vector<double> gains(splits);
  for (std::size_t i = 0; i < splits; ++i) {
    const double inverse = 1 / (all.weight - before.weight[i]);
    const double v = all.v - before.v[i], w = all.w - before.w[i];
    const double spread = (all.ww - before.ww[i]) - w * w * inverse;
    const double product = (all.vw - before.vw[i]) - v * w * inverse;
    gains[i] = v * v * inverse + product * product / (spread > least_spread ? spread : kEndless);
  }
  return gains;
}
}  // namespace

void WeightedMoments::add(Point in, double its_weight) {
  if (moments.n == 0) {
    moments = Moments(std::span<const Point>(&in, 1));
    weight = its_weight;
    return;
  }
  const Point c = moments.centred(in);
  const double before = weight;
  ++moments.n;
  weight += its_weight;
  moments.mean.x += its_weight * c.x / weight;
  moments.mean.y += its_weight * c.y / weight;
  const double share = its_weight * before / weight;
  moments.sxx += share * c.x * c.x;
  moments.sxy += share * c.x * c.y;
  moments.syy += share * c.y * c.y;
}

double evidence_of_score(double h) {
  return -std::log(2 * normal_tail(h));
}

double score_of_evidence(double evidence) {
  return normal_score_of_tail(std::exp(-evidence) / 2);
}

// The line that v is the residual from: residual = y - slope x + offset of a pair relative to the mean.
struct PairChart::Line {
  double delta = 1, slope = 1, offset = 0;

  [[nodiscard]] double residual(Point centred) const { return centred.y - slope * centred.x + offset; }
  // Fitted true value of x times (delta + slope^2), relative to the mean: only its linear relations count.
  [[nodiscard]] double fitted(Point centred) const { return delta * centred.x + slope * centred.y; }

  // Sums of older pairs, which follow for any line since v and w are linear in x and y.
  [[nodiscard]] ResidualSums sums_of(const WeightedMoments& block, const Moments& all) const {
    const Moments& m = block.moments;
    if (m.n == 0) return {};
    const Point c = all.centred({m.origin.x + m.mean.x, m.origin.y + m.mean.y});
    const double n = block.weight, b = slope, v = residual(c), w = fitted(c);
    return {n,
            n * v,
            n * w,
            (delta - b * b) * m.sxy - delta * b * m.sxx + b * m.syy + n * v * w,
            delta * delta * m.sxx + 2 * delta * b * m.sxy + b * b * m.syy + n * w * w,
            std::max(0.0, m.syy - 2 * b * m.sxy + b * b * m.sxx) + n * v * v};
  }
};

struct PairChart::Scan {
  int first = 0;               ///< pairs before the first split looked at
  std::vector<double> gains;   ///< G of each split from there on
  std::vector<double> weight;  ///< sum of the weights before it; goes on to the split before the newest pair
  std::vector<double> before;  ///< sum of v before it; the same
  int degrees = 0;             ///< of freedom of S_v - G
  double residual = 0;         ///< S_v
  double least = 0;            ///< S_v - G is never taken below this
  double total = 0;            ///< sum of the weights of all pairs
  double sum = 0;              ///< of v over all pairs: of an own line zero but for rounding
  std::size_t best = 0;
};

PairChart::PairChart(int split_memory, double resolution, std::optional<EstablishedLine> established)
    : memory_(static_cast<std::size_t>(split_memory)), resolution_(resolution), established_(established) {
  if (split_memory < 1) throw std::invalid_argument("split_memory must be at least 1");
  newest_.reserve(memory_ + 1);
}

void PairChart::insert(Point point, Instant at, int later, double weight) {
  all_.add(point, weight);
  newest_.insert(newest_.end() - later, Entry{point, at, weight});
  if (newest_.size() > memory_) {
    block_.add(newest_.front().point, newest_.front().weight);
    newest_.erase(newest_.begin());
  }
}

void PairChart::begin_stretch() {
  restart(0);
  off_established_line_ = false;
}

void PairChart::restart(int n) {
  off_established_line_ = true;
  newest_.erase(newest_.begin(), newest_.end() - n);
  all_ = block_ = WeightedMoments();
  for (const Entry& entry : newest_) all_.add(entry.point, entry.weight);
}

std::optional<PairChart::Line> PairChart::line(double delta) const {
  const Moments& m = all_.moments;
  if (against_established_line()) {
    const double b = established_->slope;
    return Line{delta, b, m.mean_difference() - (b - 1) * m.mean_x() - established_->intercept};
  }
  const DemingLine own = deming_line(m, delta);
  if (!own.exists() || !(own.slope > 0)) return std::nullopt;
  return Line{delta, own.slope, 0};
}

std::optional<PairChart::Scan> PairChart::scan(double delta) const {
  const int n = pairs();
  if (n < kLeastPairsOnChart) return std::nullopt;
  const auto line = this->line(delta);
  if (!line) return std::nullopt;

  const bool own = !against_established_line();
  const int least_before = own ? kLeastBefore : 0, older = block_.moments.n;
  Scan scan;
  scan.first = std::max(least_before, older);
  ResidualSums sums = line->sums_of(block_, all_.moments);
  Prefixes before(newest_.size());
  int k = older;
  for (const Entry& entry : newest_) {
    if (k++ >= least_before) before.push_back(sums);
    const Point c = all_.moments.centred(entry.point);
    sums.add(entry.weight, line->residual(c), line->fitted(c));
  }
  const int splits = n - kLeastAfter - scan.first + 1;
  if (splits < 1) return std::nullopt;
  scan.gains = (own ? gains_of : gains_after)(before, sums, static_cast<std::size_t>(splits));
  scan.weight = std::move(before.weight);
  scan.before = std::move(before.v);
  scan.degrees = n - (own ? kSpentDegrees : kSpentByLineAfter);
  scan.residual = sums.vv;
  scan.total = sums.weight;
  scan.sum = sums.v;
  scan.best =
      static_cast<std::size_t>(std::max_element(scan.gains.begin(), scan.gains.end()) - scan.gains.begin());
  scan.least = scan.degrees * least_variance(all_.moments, line->slope, resolution_) * (sums.weight / n);
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
  return 0.5 * scan.degrees * std::log1p(gain / rest);
}

// A large step signals while fewer pairs than a line needs have come after it; the best split then lies at
// the last one looked at, and the mean alone tells which of that and the later ones it is.
std::size_t PairChart::start_of(const Scan& scan) const {
  if (scan.best + 1 < scan.gains.size()) return scan.best;
  std::size_t best = scan.best;
  double largest = -1;
  for (std::size_t i = scan.best; i < scan.before.size(); ++i) {
    const double v = scan.before[i], rest = scan.sum - v, weight = scan.weight[i];
    const double of_before = against_established_line() ? 0 : v * v / weight;
    const double gain = of_before + rest * rest / (scan.total - weight);
    if (gain <= largest) continue;
    largest = gain;
    best = i;
  }
  return best;
}

double PairChart::log_likelihood_gain(const Scan& scan, double gain) const {
  const double rest = std::max(scan.residual - std::max(0.0, gain), scan.least);
  return rest > 0 ? -0.5 * pairs() * std::log(rest) : 0;
}

Instant PairChart::first_after(int split) const {
  return newest_[static_cast<std::size_t>(split - block_.moments.n)].at;
}

std::optional<Split> PairChart::best_split(double delta) const {
  const auto found = scan(delta);
  if (!found) return std::nullopt;
  Split split;
  const std::size_t start = start_of(*found);
  split.before = found->first + static_cast<int>(start);
  split.after = pairs() - split.before;
  split.evidence = evidence_of(*found);
  const double v_before = found->before[start], weight_before = found->weight[start];
  const double mean_before = against_established_line() ? 0 : v_before / weight_before;
  split.shift = (found->sum - v_before) / (found->total - weight_before) - mean_before;
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
