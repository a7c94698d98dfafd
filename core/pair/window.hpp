#pragma once
// Purpose: the newest pairs of a stretch, at most `capacity` and not older than `age`, with their moments
// kept
//   in step.
// Inputs: pairs in time order; `age` counts back from the newest pair.
// Method: Moments are updated pair by pair and rebuilt from the pairs at every pair whose number in its
//   stretch is a multiple of the capacity, and at once when a removal leaves less than 1e-3 of a sum of
//   squares (the rest would be mostly the rounding error of what went).
// Accuracy: moments within 1e-10 relative of a fresh computation, whatever came and went.
// Degenerate: none; empty is a state.
// Cost: O(1) arithmetic a pair, O(n) at a rebuild.
#include <cstdint>
#include <optional>
#include <span>
#include <vector>

#include "core/base/instant.hpp"
#include "core/pair/moments.hpp"

namespace agreed {

/// What a pair in the window is besides its values.
struct WindowEntry {
  Instant at;
  std::int64_t serial = 0;          ///< number of the pair in the comparison, from 1
  double x_share = 1, y_share = 1;  ///< error variance of the mean / of a single result: 1 / replicates
};

class Window {
 public:
  /// capacity >= 1, else std::invalid_argument.
  Window(int capacity, std::optional<Duration> age);

  /// Puts a pair in its place: `later` pairs of the window were measured after it (0: it is the newest).
  void insert(Point point, const WindowEntry& entry, int later = 0);

  /// A new stretch that begins with the newest `n` pairs.
  void restart(int n);

  [[nodiscard]] int size() const { return static_cast<int>(points_.size()); }
  [[nodiscard]] int capacity() const { return capacity_; }
  [[nodiscard]] std::span<const Point> points() const { return points_; }
  [[nodiscard]] std::span<const WindowEntry> entries() const { return entries_; }
  [[nodiscard]] const Moments& moments() const { return moments_; }
  /// Pairs taken since the stretch began.
  [[nodiscard]] std::int64_t number() const { return number_; }
  /// Mean over the window of what replicates leave of the error variance of x and of y.
  [[nodiscard]] Point error_shares() const;
  /// All pairs have the same numbers of replicates.
  [[nodiscard]] bool has_equal_shares() const;

 private:
  void drop_oldest();
  void rebuild_if_mostly_gone(double sxx_before, double syy_before);

  int capacity_;
  std::optional<Duration> age_;
  std::vector<Point> points_;
  std::vector<WindowEntry> entries_;
  Moments moments_;
  std::int64_t number_ = 0;
  int replicated_ = 0;  ///< pairs that are not single results on both sides
};

}  // namespace agreed
