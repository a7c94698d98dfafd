#pragma once
// Run lengths by simulation: streams of independent normal readings (pairs about a line) run until the change
// score first exceeds each of several limits; the mean number of readings tested until then is the run length
// of that limit.
#include <cmath>
#include <cstdint>
#include <optional>
#include <random>
#include <vector>

#include "core/chart/level_score.hpp"
#include "core/chart/precision_score.hpp"
#include "core/chart/run_length.hpp"
#include "core/pair/pair_chart.hpp"

namespace agreed::test {

constexpr int kSplitMemory = 400;

inline std::optional<double> given(double resolution) {
  return resolution > 0 ? std::optional(resolution) : std::nullopt;
}
inline double rounded(double value, double resolution) {
  return resolution > 0 ? resolution * std::round(value / resolution) : value;
}

/// Readings of one check standard, sd 1; rounded to the resolution, if one is given.
class LevelStream {
 public:
  static constexpr Score score = Score::level;
  static constexpr double limits[] = {2.6, 2.8, 3.0, 3.15, 3.3, 3.5, 3.7, 3.86, 4.0, 4.2, 4.4, 4.6, 4.8};

  explicit LevelStream(double resolution = 0)
      : resolution_(resolution), stretch_(kSplitMemory, given(resolution)) {}

  /// False while there is nothing to test.
  bool take(std::mt19937_64& random) {
    stretch_.append(Instant{}, rounded(normal_(random), resolution_), 0);
    if (!has_level_splits(stretch_)) return false;
    t_ = best_level_split(stretch_).t;
    return true;
  }
  [[nodiscard]] bool exceeds(double h) const {
    const std::int64_t n = stretch_.count();
    return level_score_exceeds(t_, n, level_limit_at(n, h));
  }
  [[nodiscard]] double t() const { return t_; }

 private:
  std::normal_distribution<double> normal_;
  double resolution_;
  Stretch stretch_;
  double t_ = 0;
};

class PrecisionStream {
 public:
  static constexpr Score score = Score::precision;
  static constexpr double limits[] = {2.4, 2.6, 2.8, 3.0, 3.15, 3.3, 3.5, 3.7, 3.86, 4.0, 4.2, 4.4};

  explicit PrecisionStream(double resolution = 0)
      : resolution_(resolution), stretch_(kSplitMemory, given(resolution)) {}

  bool take(std::mt19937_64& random) {
    stretch_.append(Instant{}, rounded(normal_(random), resolution_), 0);
    if (!has_precision_splits(stretch_)) return false;
    score_ = best_precision_split(stretch_, scratch_).score;
    return true;
  }
  [[nodiscard]] bool exceeds(double h) const { return score_ > h; }

 private:
  std::normal_distribution<double> normal_;
  double resolution_;
  Stretch stretch_;
  std::vector<float> scratch_;
  double score_ = 0;
};

/// Errors of equal variance on both sides, a fiftieth of the range of the samples, and lambda known.
class PairStream {
 public:
  static constexpr Score score = Score::pairs;
  static constexpr double limits[] = {2.8, 3.0, 3.15, 3.3, 3.5, 3.7, 3.86, 4.0, 4.2, 4.4, 4.6, 4.8};

  bool take(std::mt19937_64& random) {
    const double truth = sample_(random);
    const double x = truth + error_(random), y = truth + error_(random);
    chart_.insert({x, y}, Instant{});
    const auto evidence = chart_.evidence(1);
    evidence_ = evidence.value_or(0);
    return evidence.has_value();
  }
  [[nodiscard]] bool exceeds(double h) const { return evidence_ > evidence_of_score(h); }

 private:
  std::uniform_real_distribution<double> sample_{9, 15};
  std::normal_distribution<double> error_{0, 0.12};
  PairChart chart_{kSplitMemory, 0};
  double evidence_ = 0;
};

/// Pairs about an established line: those before a split lie on it.
class EstablishedLineStream {
 public:
  static constexpr Score score = Score::pairs_established_line;
  static constexpr double limits[] = {3.5, 3.86, 4.0, 4.2, 4.4, 4.6};

  bool take(std::mt19937_64& random) {
    const double truth = sample_(random);
    const double x = truth + error_(random);
    chart_.insert({x, line.intercept + line.slope * truth + error_(random)}, Instant{});
    const auto evidence = chart_.evidence(1);
    evidence_ = evidence.value_or(0);
    return evidence.has_value();
  }
  [[nodiscard]] bool exceeds(double h) const { return evidence_ > evidence_of_score(h); }

 private:
  static constexpr EstablishedLine line{0.1, 1.02};
  std::uniform_real_distribution<double> sample_{9, 15};
  std::normal_distribution<double> error_{0, 0.02};
  PairChart chart_{kSplitMemory, 0, line};
  double evidence_ = 0;
};

struct Tally {
  double limit = 0, sum = 0, squares = 0;
  int signals = 0;

  void add(double tested) {
    sum += tested;
    squares += tested * tested;
    ++signals;
  }
  [[nodiscard]] double mean() const { return sum / signals; }
  [[nodiscard]] double error() const { return std::sqrt((squares / signals - mean() * mean()) / signals); }
};

template <class Stream>
void run_stream(std::vector<Tally>& tallies, std::mt19937_64& random) {
  Stream stream;
  double tested = 0;
  for (auto next = tallies.begin(); next != tallies.end();) {
    if (!stream.take(random)) continue;
    ++tested;
    for (; next != tallies.end() && stream.exceeds(next->limit); ++next) next->add(tested);
  }
}

/// `streams` of them, up to the limit `largest`.
template <class Stream>
std::vector<Tally> simulate(int streams, std::uint64_t seed, double largest) {
  std::vector<Tally> tallies;
  for (const double limit : Stream::limits)
    if (limit <= largest) tallies.push_back({limit});
  std::mt19937_64 random(seed);
  for (int i = 0; i < streams; ++i) run_stream<Stream>(tallies, random);
  return tallies;
}

}  // namespace agreed::test
