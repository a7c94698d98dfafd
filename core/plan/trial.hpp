#pragma once
// Trials of one simulation, one at a time, so that who waits can be shown how far it is. Each trial draws
// from a stream of its own, made of the seed and the trial's number: same input, same waits, on every
// machine; and two settings that are compared live through the same luck.
#include <cstdint>
#include <functional>
#include <optional>

#include "core/base/random_normal.hpp"
#include "core/plan/waits.hpp"

namespace agreed::plan {

struct Trials {
  int count = 1'000;    ///< >= 1
  int horizon = 1'000;  ///< readings (pairs) followed after the change, >= 1
  std::uint64_t seed = 20'261'202;
};

/// Readings (pairs) from a change until it is told, in one simulated life; nothing: not within `horizon`.
using Trial = std::function<std::optional<int>(RandomNormal& draw, int horizon)>;

class TrialRun {
 public:
  /// Throws std::invalid_argument for a count or horizon below 1.
  TrialRun(Trial trial, const Trials& trials);

  /// One more trial; false when all were made.
  bool step();
  [[nodiscard]] double share_done() const;
  /// Of the trials made so far.
  [[nodiscard]] const Waits& waits() const { return waits_; }

 private:
  Trial trial_;
  Trials trials_;
  Waits waits_;
};

}  // namespace agreed::plan
