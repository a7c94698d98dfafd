#pragma once
// Purpose: has the relation of the two analyzers changed at some moment of this stretch? Fast, and blind to
//   the size of the bias (that is the verdict's question).
// Inputs: accepted pairs in time order, each with a weight; delta = 1 / lambda of the pairs; the least
// residual
//   variance that the resolution of the results allows; an established line, if there is one.
// Method: own, after D. M. Hawkins, P. Qiu and C. W. Kang, J. Qual. Technol. 35 (2003) 355. One Deming line
//   through all n pairs gives residuals v and fitted true values w, uncorrelated with each other; for each
//   split (k >= 4 before, at least 3 after) G = gain in the explained sum of squares of v by a line in w on
//   each side; F = (G/2) / ((S_v - G)/(n-5)) on (2, n-5). The upper tail of F on (2, m) is
//   ((S_v-G)/S_v)^(m/2), so the evidence -ln(tail) = m/2 ln(1 + G/(S_v - G)) is compared with that of the
//   limit without special functions; score = normal score of half the tail at the best split.
//   All sums are weighted; a weight is 1 / (error variance of the pair over that of a single result where the
//   error model is 1), fixed when the pair comes, so that the sums before each split stay valid.
//   Against an established line: v = residual from it; before a split the pairs lie on it, after the split on
//   a line of their own (any k >= 0, at least 3 after): F = (G/2) / ((S_v - G)/(n-3)) on (2, n-3), S_v about
//   the established line. (A line of their own on both sides tells steps no sooner and has no constant
//   limit.) After a change was told the pairs are off the established line for good, so the ordinary question
//   is asked until the next stretch begins.
// Assumptions: errors of the variance that the weights say, pairs independent.
// Accuracy: equals the split fits done one by one to 1e-8; an older block loses 1/(1-r^2) of its digits.
// Degenerate: fewer than 7 pairs, or no line of positive slope: nothing. Weights that are all equal change
//   nothing but rounding, and powers of two not even that.
// Cost: O(min(n, split_memory)), about 10 ns a split; state bounded: the newest `split_memory` pairs and one
// block.
#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "core/base/finding.hpp"
#include "core/base/instant.hpp"
#include "core/base/settings.hpp"
#include "core/pair/moments.hpp"

namespace agreed {

/// Moments of weighted pairs: means and sums of squares and products with the weights in them.
struct WeightedMoments {
  Moments moments;    ///< `n` counts the pairs
  double weight = 0;  ///< sum of the weights

  /// weight > 0. With weights of 1 the same to the bit as Moments.
  void add(Point in, double its_weight);
};

/// The best split of a stretch into two.
struct Split {
  int before = 0;        ///< pairs before it; of several equally good ones the fewest
  int after = 0;         ///< pairs after it
  double evidence = 0;   ///< -ln of the F tail
  double shift = 0;      ///< mean residual after minus before (minus the established line: its mean is zero)
  Instant started_at{};  ///< first pair after the split
  Period started_between;  ///< first pairs after all splits whose log-likelihood is within 3 of the best
};

/// Evidence whose score is h: -ln(2 P(Z > h)).
[[nodiscard]] double evidence_of_score(double h);
/// The inverse, for evidence >= 0.
[[nodiscard]] double score_of_evidence(double evidence);

class PairChart {
 public:
  /// split_memory >= 1, else std::invalid_argument. `resolution`: of the results, 0 when not known.
  PairChart(int split_memory, double resolution, std::optional<EstablishedLine> established = std::nullopt);

  /// Puts a pair in its place: `later` accepted pairs were measured after it. weight > 0.
  void insert(Point point, Instant at, int later = 0, double weight = 1);
  /// A new stretch without pairs; an established line is asked about again.
  void begin_stretch();
  /// A change was told: the stretch begins with the newest `n` pairs, n <= min(pairs, split_memory).
  void restart(int n);

  [[nodiscard]] int pairs() const { return all_.moments.n; }
  /// Whether changes are looked for against the established line.
  [[nodiscard]] bool against_established_line() const { return established_ && !off_established_line_; }
  /// Of the best split, at one delta.
  [[nodiscard]] std::optional<double> evidence(double delta) const;
  [[nodiscard]] std::optional<Split> best_split(double delta) const;

 private:
  struct Entry {
    Point point;
    Instant at;
    double weight = 1;
  };
  struct Line;
  struct Scan;
  [[nodiscard]] std::optional<Line> line(double delta) const;
  [[nodiscard]] std::optional<Scan> scan(double delta) const;
  [[nodiscard]] double evidence_of(const Scan& scan) const;
  [[nodiscard]] std::size_t start_of(const Scan& scan) const;
  [[nodiscard]] double log_likelihood_gain(const Scan& scan, double gain) const;
  [[nodiscard]] Instant first_after(int split) const;

  std::size_t memory_;
  double resolution_;
  std::optional<EstablishedLine> established_;
  bool off_established_line_ = false;
  WeightedMoments all_;    ///< of the whole stretch
  WeightedMoments block_;  ///< of the pairs before the newest ones
  std::vector<Entry> newest_;
};

}  // namespace agreed
