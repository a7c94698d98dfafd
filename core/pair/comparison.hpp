#pragma once
// One comparison as a fold: pairs in their order, each with the error ratio of its time; findings out.
#include <memory>
#include <optional>
#include <vector>

#include "core/base/event.hpp"
#include "core/base/finding.hpp"
#include "core/base/settings.hpp"
#include "core/pair/comparison_change.hpp"
#include "core/pair/comparison_view.hpp"
#include "core/pair/pair.hpp"

namespace agreed {

class Comparison {
 public:
  /// `settings` outlives the comparison.
  Comparison(const Settings& settings, ComparisonIndex index);
  ~Comparison();
  Comparison(Comparison&&) noexcept;
  Comparison& operator=(Comparison&&) noexcept;
  Comparison(const Comparison&);
  Comparison& operator=(const Comparison&);

  /// Takes the next pair; it is not earlier than anything before it. Appends what it leads to.
  void add(const Pair& pair, const ErrorRatio& ratio, std::vector<Finding>& findings);

  /// A restarting intervention on one of its analyzers: window and pair chart begin anew at
  /// `intervention.at`.
  void add(const Intervention& intervention, std::vector<Finding>& findings);

  /// The time of the newest pair or intervention folded.
  [[nodiscard]] std::optional<Instant> last_at() const;

  /// Appends the findings that hold now, as if just made: what the alert book is compared with after a fold.
  void conditions(std::vector<Finding>& findings) const;

  /// Samples of the newest 500 pairs that are set aside as outliers.
  [[nodiscard]] std::vector<std::string> set_aside() const;
  /// The time of the oldest of the newest 500 pairs; the earliest time there is when no pair is older.
  [[nodiscard]] Instant kept_since() const;

  /// The pair chart's signal is open or agreement is lost.
  [[nodiscard]] bool changed() const;
  /// While it is so.
  [[nodiscard]] std::optional<ComparisonChange> change() const;

  [[nodiscard]] Verdict verdict() const;
  /// `waiting` of the view is left 0 and `diagnosis` and `look_back` empty: halves and check standards are
  /// the monitor's.
  [[nodiscard]] ComparisonView view() const;

  struct State;  ///< what is remembered; defined for core/pair only

 private:
  std::unique_ptr<State> state_;
};

}  // namespace agreed
