#pragma once
// Waits from a simulation: how many readings (pairs) came after a change until it was told. Pure counting; a
// change that was not told within the horizon is kept as that, never as a number.
#include <optional>
#include <vector>

namespace agreed::plan {

/// A figure from a simulation, with its Monte Carlo standard error; 0: exact.
struct Simulated {
  double value = 0, standard_error = 0;
  bool operator==(const Simulated&) const = default;
};

/// `count` of `trials` >= 1. Binomial standard error after Agresti and Coull (Am. Stat. 52 (1998) 119), so
/// that it is not 0 where it was all or none.
[[nodiscard]] Simulated share_of(int count, int trials);

class Waits {
 public:
  /// Waits up to `horizon` readings are counted, >= 1.
  explicit Waits(int horizon);

  /// One trial: 1 = told by the first reading after the change; nothing: not within the horizon.
  void add(std::optional<int> wait);

  [[nodiscard]] int trials() const { return trials_; }
  [[nodiscard]] int horizon() const { return static_cast<int>(at_.size()) - 1; }
  /// Trials in which the change was not told within the horizon.
  [[nodiscard]] int unnoticed() const;

  /// The least number of readings by which a share of at least `share` (in (0, 1)) of the changes was told:
  /// 0.5 the median, 0.9 "nine in ten". Nothing if that was not reached within the horizon, or without
  /// trials. Standard error from order statistics (Woodruff, J. Am. Stat. Assoc. 47 (1952) 635): a quarter of
  /// the way between the waits at the ranks two binomial standard errors below and above; the upper one is
  /// taken for the horizon + 1 where it lies beyond.
  [[nodiscard]] std::optional<Simulated> quantile(double share) const;
  [[nodiscard]] std::optional<Simulated> median() const { return quantile(0.5); }

  /// The share told by at most `readings` readings after the change, held within 0 .. horizon. Needs trials.
  [[nodiscard]] Simulated noticed_within(int readings) const;

 private:
  [[nodiscard]] int at_rank(double rank) const;

  std::vector<int> at_;  ///< trials with that wait; [0] unused
  int trials_ = 0, noticed_ = 0;
};

}  // namespace agreed::plan
