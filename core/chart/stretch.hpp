#pragma once
// The readings of one stretch that count (those set aside are not among them), with running sums. Where a run
// of replicates was read, "reading" is the run's mean, and the scatter within runs is summed beside it.
//
// Sums are of deviations from the stretch's first value, so that a level far from zero costs no digits. The
// newest `split_memory` readings are held one by one; all before them are the sums they left behind (the
// block). Position j = 0 .. held() is the moment after j of the held readings: splitting there leaves
// block() + j readings before and held() - j after; the reading at position j >= 1 is the j-th held one.
//
// A stretch of a new lot of the standard knows the scatter that earlier lots left (Carried): it counts with
// what lies before every split, as further readings about a mean of their own.
#include <algorithm>
#include <cstdint>
#include <optional>
#include <vector>

#include "core/base/instant.hpp"
#include "core/chart/run.hpp"
#include "core/chart/sliding_array.hpp"

namespace agreed {

/// Scatter of replicates about their run's mean, pooled over runs.
struct Within {
  std::int64_t degrees = 0;  ///< k - 1 of a run of k
  double squares = 0;

  friend Within operator+(const Within& a, const Within& b) {
    return {a.degrees + b.degrees, a.squares + b.squares};
  }
  friend Within operator-(const Within& a, const Within& b) {
    return {a.degrees - b.degrees, a.squares - b.squares};
  }
};

/// Count, sum and sum of squares of deviations from a common reference.
struct Sums {
  std::int64_t n = 0;
  double sum = 0, squares = 0;
  Within within{};

  void add(double deviation, const Within& of_run = {}) {
    ++n;
    sum += deviation;
    squares += deviation * deviation;
    within = within + of_run;
  }
  /// Sum of squares about the mean; 0 without readings.
  [[nodiscard]] double about_mean() const {
    return n > 0 ? std::max(0.0, squares - sum * sum / static_cast<double>(n)) : 0.0;
  }
  friend Sums operator+(const Sums& a, const Sums& b) {
    return {a.n + b.n, a.sum + b.sum, a.squares + b.squares, a.within + b.within};
  }
  friend Sums operator-(const Sums& a, const Sums& b) {
    return {a.n - b.n, a.sum - b.sum, a.squares - b.squares, a.within - b.within};
  }
};

/// What goes on from earlier lots of the standard: scatter about their own means, not their level.
struct Carried {
  std::int64_t degrees = 0;  ///< of `squares`
  double squares = 0;        ///< about each lot's mean
  std::int64_t range_count = 0;
  double ranges = 0;  ///< sum of the moving ranges
  double shares = 0;  ///< sum of 1/replicates of `runs` runs
  std::int64_t runs = 0;
  Within within{};
  double step = 0, within_step = 0;  ///< as in Prefix: the resolution does not change with the lot
};

/// All that a stretch knows of its readings up to one of them, and that one.
struct Prefix {
  Sums sums;
  double deviation = 0;    ///< of that reading
  double ranges = 0;       ///< sum of the n - 1 moving ranges
  double step = 0;         ///< smallest gap between two different readings; 0: none differ
  double shares = 0;       ///< sum of 1/replicates
  double within_step = 0;  ///< smallest gap between two different replicates of a run; 0: none
  Run run{};               ///< that reading's; its mean is told by `deviation`
  Instant at{};
  std::int64_t point = 0;  ///< number of that reading in the life of the chart
};

class Stretch {
 public:
  /// `resolution`: of the readings, if configured; else it is the smallest step seen. `point_before`: number
  /// of the last point before the stretch.
  Stretch(int split_memory, std::optional<double> resolution, const Carried& carried = {},
          std::int64_t point_before = -1);

  void append(const Run& run, std::int64_t point);
  void append(Instant at, double value, std::int64_t point) { append(Run{at, value}, point); }

  /// Takes the readings after `start` up to position `last` out. Returns their count.
  std::int64_t set_aside(const Prefix& start, std::size_t last);

  [[nodiscard]] std::int64_t count() const { return block_ + static_cast<std::int64_t>(held()); }
  /// Readings, and degrees of freedom carried over as if they were readings: what a sum of squares about two
  /// means has two less of.
  [[nodiscard]] std::int64_t counted() const { return count() + carried_.degrees; }
  [[nodiscard]] const Carried& carried() const { return carried_; }
  [[nodiscard]] std::int64_t block() const { return block_; }
  [[nodiscard]] std::size_t held() const { return sum_.size() - 1; }
  [[nodiscard]] std::int64_t before(std::size_t j) const { return block_ + static_cast<std::int64_t>(j); }
  [[nodiscard]] Prefix prefix(std::size_t j) const;
  [[nodiscard]] Prefix last() const { return prefix(held()); }
  /// The reading that a prefix ends with, as it was appended.
  [[nodiscard]] Run run_at(const Prefix& reading) const;

  /// By position, 0 .. held().
  [[nodiscard]] const double* sum() const { return sum_.data(); }
  [[nodiscard]] const double* squares() const { return squares_.data(); }
  [[nodiscard]] const double* deviation() const { return deviation_.data(); }
  /// 1 / (readings before), 0 where there are none.
  [[nodiscard]] const double* inverse_before() const { return inverse_.data(); }
  /// 1 / (readings before - 1 + carried degrees), 0 where that is nothing.
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
  /// The least variance of a reading that its resolution allows, r^2 / 12; of a mean of k replicates of a
  /// configured resolution a k-th of that (a step seen between means is theirs already).
  [[nodiscard]] double least_variance() const {
    const double least = resolution() * resolution() / 12;
    return resolution_ && count() > 0 ? least * (rest_.back().shares / static_cast<double>(count())) : least;
  }
  /// The same of a replicate within its run.
  [[nodiscard]] double least_variance_within() const {
    const double seen = rest_.back().within_step > 0 ? rest_.back().within_step : rest_.back().step;
    const double r = resolution_.value_or(seen);
    return r * r / 12;
  }
  /// Is precision told by the replicates? They must say at least as much as the means do.
  [[nodiscard]] bool by_replicates() const {
    const std::int64_t within = rest_.back().within.degrees + carried_.within.degrees;
    return within > 0 && within >= std::max<std::int64_t>(counted() - 1, 1);
  }
  /// Scatter within the held reading at position j.
  [[nodiscard]] Within within(std::size_t j) const {
    return {rest_[j].run.replicates - 1, rest_[j].run.squares};
  }
  /// Scatter within the runs before position j of this stretch.
  [[nodiscard]] const Within& within_before(std::size_t j) const { return rest_[j].within; }
  /// False while no two readings differ: then nothing can be tested.
  [[nodiscard]] bool has_spread() const { return rest_.back().step > 0; }

  [[nodiscard]] double reference() const { return reference_; }
  [[nodiscard]] Instant first_at() const { return first_at_; }

 private:
  struct Rest {
    double ranges = 0, step = 0, shares = 0, within_step = 0;
    Within within{};
    Run run{};
    Instant at{};
    std::int64_t point = 0;
  };

  void push(const Prefix& prefix);
  [[nodiscard]] double smallest_step_to(double deviation) const;

  int split_memory_;
  std::optional<double> resolution_;
  Carried carried_;
  double reference_ = 0;
  Instant first_at_{};
  std::int64_t block_ = 0;
  SlidingArray<double> sum_, squares_, deviation_, inverse_, inverse_degrees_;
  SlidingArray<Rest> rest_;
  std::vector<double> reciprocal_;  ///< 1/split_memory .. 1/1, 0
};

}  // namespace agreed
