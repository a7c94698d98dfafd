#pragma once
// Of changes that are ever stronger, the weakest with which at least half of the trials are told in time. By
// halving; each is judged by simulation only until it is clear on which side of one half it lies, and the one
// found is confirmed with all trials. Private to core/plan.
#include <functional>
#include <optional>

#include "core/plan/trial.hpp"

namespace agreed::plan {

/// Half of the cases and more: noticed.
inline constexpr double noticed_share = 0.5;

/// A change as it is simulated.
struct Candidate {
  Trial trial;
  int readings = 0;  ///< that come in time; 0: none, so it is not enough
};

class WeakestChange {
 public:
  /// make(0) is the weakest, make(count - 1) the strongest; the strongest is tried first, and if it is not
  /// enough nothing is.
  WeakestChange(int count, std::function<Candidate(int)> make, const Trials& trials);

  /// One more portion of trials; false when done.
  bool step();
  [[nodiscard]] double share_done() const;
  /// When done: the weakest one that is confirmed; nothing: none is enough.
  [[nodiscard]] std::optional<int> found() const { return found_; }
  /// Told in time with the one found.
  [[nodiscard]] Simulated share() const { return share_; }

 private:
  void begin(int index);
  [[nodiscard]] bool is_clear() const;
  void conclude_test(bool enough);
  void conclude_confirmation();

  int count_;
  std::function<Candidate(int)> make_;
  Trials trials_;
  int fails_ = -1, holds_ = -1;  ///< the strongest known not to be enough, the weakest known to be
  int index_ = 0;                ///< being tried
  std::optional<TrialRun> run_;  ///< none: done
  int told_ = 0;
  bool confirming_ = false;
  int confirmations_ = 0, tests_ = 0;
  std::optional<int> found_;
  Simulated share_;
};

}  // namespace agreed::plan
