#pragma once
// The readings of one stretch that count (those set aside are not among them), with running sums.
//
// Sums are of deviations from the stretch's first value, so that a level far from zero costs no digits. The
// newest `split_memory` readings are held one by one; all before them are the sums they left behind (the
// block). Position j = 0 .. held() is the moment after j of the held readings: splitting there leaves
// block() + j readings before and held() - j after; the reading at position j >= 1 is the j-th held one.
#include <algorithm>
#include <cstdint>
#include <optional>
#include <vector>

#include "core/base/instant.hpp"
#include "core/chart/sliding_array.hpp"

namespace agreed {

/// Count, sum and sum of squares of deviations from a common reference.
struct Sums {
  std::int64_t n = 0;
  double sum = 0, squares = 0;

  void add(double deviation) {
    ++n;
    sum += deviation;
    squares += deviation * deviation;
  }
  /// Sum of squares about the mean; 0 without readings.
  [[nodiscard]] double about_mean() const {
    return n > 0 ? std::max(0.0, squares - sum * sum / static_cast<double>(n)) : 0.0;
  }
  friend Sums operator+(const Sums& a, const Sums& b) {
    return {a.n + b.n, a.sum + b.sum, a.squares + b.squares};
  }
  friend Sums operator-(const Sums& a, const Sums& b) {
    return {a.n - b.n, a.sum - b.sum, a.squares - b.squares};
  }
};

/// All that a stretch knows of its readings up to one of them, and that one.
struct Prefix {
  Sums sums;
  double deviation = 0;  ///< of that reading
  double ranges = 0;     ///< sum of the n - 1 moving ranges
  double step = 0;       ///< smallest gap between two different readings; 0: none differ
  Instant at{};
  std::int64_t point = 0;  ///< number of that reading in the life of the chart
};

class Stretch {
 public:
  /// `resolution`: of the readings, if configured; else it is the smallest step seen.
  Stretch(int split_memory, std::optional<double> resolution);

  void append(Instant at, double value, std::int64_t point);

  /// Takes the readings after `start` up to position `last` out. Returns their count.
  std::int64_t set_aside(const Prefix& start, std::size_t last);

  [[nodiscard]] std::int64_t count() const { return block_ + static_cast<std::int64_t>(held()); }
  [[nodiscard]] std::int64_t block() const { return block_; }
  [[nodiscard]] std::size_t held() const { return sum_.size() - 1; }
  [[nodiscard]] std::int64_t before(std::size_t j) const { return block_ + static_cast<std::int64_t>(j); }
  [[nodiscard]] Prefix prefix(std::size_t j) const;
  [[nodiscard]] Prefix last() const { return prefix(held()); }

  /// By position, 0 .. held().
  [[nodiscard]] const double* sum() const { return sum_.data(); }
  [[nodiscard]] const double* squares() const { return squares_.data(); }
  [[nodiscard]] const double* deviation() const { return deviation_.data(); }
  /// 1 / (readings before), 0 where there are none.
  [[nodiscard]] const double* inverse_before() const { return inverse_.data(); }
  /// 1 / (readings before - 1), 0 where there are less than 2.
  [[nodiscard]] const double* inverse_degrees_before() const { return inverse_degrees_.data(); }
  /// 1 / (readings after), 0 at held().
  [[nodiscard]] const double* inverse_after() const {
    return reciprocal_.data() + (static_cast<std::size_t>(split_memory_) - held());
  }

  /// First position with at least `before` readings before it.
  [[nodiscard]] std::size_t first_split(std::int64_t before) const {
    return static_cast<std::size_t>(std::max<std::int64_t>(0, before - block_));
  }

  /// Configured, or the smallest step seen; 0 while no two readings differ.
  [[nodiscard]] double resolution() const { return resolution_.value_or(rest_.back().step); }
  /// The least variance of a reading that its resolution allows, r^2 / 12.
  [[nodiscard]] double least_variance() const { return resolution() * resolution() / 12; }
  /// False while no two readings differ: then nothing can be tested.
  [[nodiscard]] bool has_spread() const { return rest_.back().step > 0; }

  [[nodiscard]] double reference() const { return reference_; }
  [[nodiscard]] Instant first_at() const { return first_at_; }

 private:
  struct Rest {
    double ranges = 0, step = 0;
    Instant at{};
    std::int64_t point = 0;
  };

  void push(const Prefix& prefix);
  [[nodiscard]] double smallest_step_to(double deviation) const;

  int split_memory_;
  std::optional<double> resolution_;
  double reference_ = 0;
  Instant first_at_{};
  std::int64_t block_ = 0;
  SlidingArray<double> sum_, squares_, deviation_, inverse_, inverse_degrees_;
  SlidingArray<Rest> rest_;
  std::vector<double> reciprocal_;  ///< 1/split_memory .. 1/1, 0
};

}  // namespace agreed
